package table

import "slices"

// TagNames are the columns appended to every record, in this order. Their types:
//
//	weir_score     float64, null when unscored
//	weir_verdict   dictionary<int8, utf8> of pass, suspect, quarantine, unscored
//	weir_implied   utf8, null when unscored
//	weir_margin    float64, null when unscored
//	weir_reason    dictionary<int8, utf8> of the reasons, null when scored
//	weir_snapshot  utf8, null when there was no snapshot
//
// Scores are float64 so that a score compares with a threshold as the verdict did. Only lists that are known from the
// start are dictionaries, for those of an Arrow file can't grow.
func TagNames() []string {
	return []string{"weir_score", "weir_verdict", "weir_implied", "weir_margin", "weir_reason", "weir_snapshot"}
}

// IsTag tells whether a column name is one of TagNames.
func IsTag(name string) bool { return slices.Contains(TagNames(), name) }
