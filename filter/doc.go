// Package filter carries records from a source to a sink and says of each how likely its label is wrong: it fills the
// window, has the model retrained, scores, gives verdicts, and accounts for every record.
//
// A [Sweep] is one pass over a stored input. With the whole input as one window it reads it twice: first to sample and
// train, then to judge. With a sliding window it reads it once and retrains as it goes. Either way a record is judged
// by a model that did not see its label, is delivered once and in order, and the outcome depends on the rows alone: not
// on batches, workers or time.
//
// Goroutines of a run: one reads ahead, one delivers, Config.Workers judge side by side, and the caller's own keeps
// window, breaker and meters. The package knows no file format and no model but through the interfaces it declares.
package filter
