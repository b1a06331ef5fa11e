package noise

// Limits of rows: a search over many models looks at an even sample, the models it leaves are then fitted to all rows.
const (
	quickRows  = 4000
	searchRows = 6000
)

// thin is every s-th row of d, for the smallest s that leaves at most so many; d itself if it has few
// more.
func (d *Data) thin(most int) *Data {
	n := d.Rows()
	if n <= most*4/3 {
		return d
	}
	step := (n + most - 1) / most
	k := d.Classes
	out := &Data{Classes: k, Sources: d.Sources, Workers: d.Workers, Members: make([][]float64, len(d.Members))}
	for i := 0; i < n; i += step {
		out.Observed = append(out.Observed, d.Observed[i])
		if d.Source != nil {
			out.Source = append(out.Source, d.Source[i])
		}
		for m, x := range d.Members {
			out.Members[m] = append(out.Members[m], x[i*k:(i+1)*k]...)
		}
	}
	return out
}
