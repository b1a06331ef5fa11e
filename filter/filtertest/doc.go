// Package filtertest holds one list of behaviours that every filter.Source and filter.Sink must have.
//
// A connector's test calls [Source] and [Sink] with ways to open and read its own format; [CheckSource] and [CheckSink]
// give the same findings as errors.
package filtertest
