package encode

import "math"

// Block writes the listed rows of the columns, one after the other, into dense (len(rows)·Dense; the last value of each
// row is the constant 1, every column adds at most about 1/√columns to its length) and bins (len(rows)·Bins). It
// allocates nothing. Cost O(log knots) a number.
func (e *Encoder) Block(cols []Input, rows []int32, dense []float32, bins []uint8) {
	if len(rows) == 0 {
		return
	}
	clear(dense[:len(rows)*e.Dense])
	clear(bins[:len(rows)*e.Bins])
	for r := range rows {
		dense[(r+1)*e.Dense-1] = 1
	}
	scale := 1 / float32(math.Sqrt(float64(len(e.Parts))))
	at := 0
	for k := range e.Parts {
		p := &e.Parts[k]
		if p.Numbers == nil {
			e.category(p, &cols[k], rows, dense[at:], bins[at:], scale)
			at += p.Width()
			continue
		}
		per := scale
		if n := len(p.Numbers); n > 1 {
			per /= float32(math.Sqrt(float64(n)))
		}
		for j := range p.Numbers {
			u := &p.Numbers[j]
			e.number(u, cols[k].Values[j:], len(p.Numbers), rows, dense[at:], bins[at:], per)
			at++
			if u.Missing {
				at++
			}
		}
	}
}

// category marks the slot of each row. dense and bins begin at the part's first column.
func (e *Encoder) category(p *Part, in *Input, rows []int32, dense []float32, bins []uint8, scale float32) {
	missing := len(p.Levels) + 1
	for r, i := range rows {
		s := missing
		if c := in.Codes[i]; c >= 0 {
			s = int(in.Slots[c])
		}
		dense[r*e.Dense+s] = scale
		bins[r*e.Bins+s] = 1
	}
}

// number writes one number of each row, and the mark of its absence beside it. values begins at the first row's.
func (e *Encoder) number(u *Number, values []float64, size int, rows []int32, dense []float32, bins []uint8, scale float32) {
	l := u.find
	for r, i := range rows {
		v := values[int(i)*size]
		missing := v != v
		if missing {
			v = u.Filler
		}
		bin, normal := l.find(v)
		dense[r*e.Dense] = scale * float32(normal)
		bins[r*e.Bins] = uint8(bin)
		if missing && u.Missing {
			dense[r*e.Dense+1] = scale
			bins[r*e.Bins+1] = 1
		}
	}
}
