// Package filter carries records from a source to a sink and says of each how likely its label is wrong: it fills the
// window, has the model retrained, scores, gives verdicts, and accounts for every record.
package filter
