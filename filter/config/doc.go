// Package config reads the settings of labelweir: one YAML file for every command, the environment, and flags.
//
// Decoding is strict: an unknown or repeated key, or a value that does not parse, is a fault with file, line, column
// and the nearest known key, and all faults are reported at once. A setting is named by its path in the file
// (window.records); the environment variable of the same setting is LABELWEIR_ and the path in capitals
// (LABELWEIR_WINDOW_RECORDS). A flag wins over the environment, the environment over the file, the file over the default.
package config
