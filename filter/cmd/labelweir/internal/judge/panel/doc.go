// Package panel reads a folder of tables with known wrong labels.
//
// NAME.arrow holds a table's columns, with id (row number) and label (the right label); NAME.noise.arrow holds the
// same rows in the same order: id and, for each noise plan and seed, PLAN.SEED.label (the label to feed in),
// PLAN.SEED.flipped (whether it is wrong) and, for some plans, PLAN.SEED.source (who gave it). baselines.tsv holds
// what other methods reached. Numbers become number columns with NaN for null, dictionaries category columns.
package panel
