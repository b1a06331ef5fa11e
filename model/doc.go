// Package model finds wrong labels: it fits a classifier whose loss is bounded, so that wrong labels cannot drag it,
// and turns its scores into the probability that a row's observed label is wrong.
//
// It is mathematics only: rows come in as a [Table], scores go out as [Score] values, fitted scorers are immutable
// [Snapshot] values. It has no clock, no files and no logger; randomness comes from a seed, and the same table and
// seed give the same bytes whatever the number of cores.
package model
