// Package connectors holds nothing itself. The packages below it read and write the formats of tables; its tests hold
// all of them against damaged files.
package connectors
