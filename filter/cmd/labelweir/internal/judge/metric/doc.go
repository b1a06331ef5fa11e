// Package metric measures how well mislabel scores agree with the truth, where the truth is known: how wrong labels
// are ranked, whether a score is the probability it claims to be, and what is caught above a threshold.
//
// A score p is NaN for a row that was not judged. Such a row ranks last, is never caught, and says nothing about
// calibration. Figures that have no value (a share of nothing) are NaN.
package metric
