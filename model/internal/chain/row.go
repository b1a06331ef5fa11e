package chain

// narrow is the number of columns up to which leaf columns are kept in 16 bits: half the memory to stream, and an index
// that cannot leave an array of this length, so the loops below need no bounds check.
const narrow = 1 << 16

// number is the dense block of packed row i.
func (s *Scratch) number(i int) []float32 {
	r := int(s.row[i])
	return s.x[r*s.dense : (r+1)*s.dense]
}

// columnsOf are the leaf columns of packed row i, where thin is not.
func (s *Scratch) columnsOf(i int) []int32 {
	r := int(s.row[i])
	return s.leaves[r*s.trees : (r+1)*s.trees]
}

// dot is w·x of packed row i.
func (s *Scratch) dot(i int) float64 {
	sum := dotDense(s.number(i), s.w)
	if s.thin != nil {
		return sum + s.value*sumThin(s.thin[i*s.trees:(i+1)*s.trees], (*[narrow]float64)(s.wide))
	}
	return sum + s.value*sumWide(s.columnsOf(i), s.w[s.dense:])
}

// add adds t·x of packed row i to w. The caller says moved when it is done with all rows.
func (s *Scratch) add(i int, t float64) {
	addDense(s.w, t, s.number(i))
	t *= s.value
	if s.thin != nil {
		w := (*[narrow]float64)(s.wide)
		for _, c := range s.thin[i*s.trees : (i+1)*s.trees] {
			w[c] += t
		}
		return
	}
	w := s.w[s.dense:]
	for _, c := range s.columnsOf(i) {
		w[c] += t
	}
}

// leaf is the column of packed row i's leaf in tree t.
func (s *Scratch) leaf(i, t int) int {
	if s.thin != nil {
		return int(s.thin[i*s.trees+t])
	}
	return s.dense + int(s.columnsOf(i)[t])
}

// squares32 is Σ x², in four sums so that additions need not wait for each other.
func squares32(x []float32) float64 {
	var a, b, c, d float64
	for len(x) >= 4 {
		a += float64(x[0]) * float64(x[0])
		b += float64(x[1]) * float64(x[1])
		c += float64(x[2]) * float64(x[2])
		d += float64(x[3]) * float64(x[3])
		x = x[4:]
	}
	for _, v := range x {
		a += float64(v) * float64(v)
	}
	return (a + b) + (c + d)
}

// sumThin is Σ w[c] over the columns c.
func sumThin(l []uint16, w *[narrow]float64) float64 {
	var a, b, c, d, e, f, g, h float64
	for ; len(l) >= 8; l = l[8:] {
		a += w[l[0]]
		b += w[l[1]]
		c += w[l[2]]
		d += w[l[3]]
		e += w[l[4]]
		f += w[l[5]]
		g += w[l[6]]
		h += w[l[7]]
	}
	for _, k := range l {
		a += w[k]
	}
	return ((a + b) + (c + d)) + ((e + f) + (g + h))
}

// sumWide is sumThin for any number of columns, in the same order of additions.
func sumWide(l []int32, w []float64) float64 {
	var a, b, c, d, e, f, g, h float64
	for ; len(l) >= 8; l = l[8:] {
		a += w[l[0]]
		b += w[l[1]]
		c += w[l[2]]
		d += w[l[3]]
		e += w[l[4]]
		f += w[l[5]]
		g += w[l[6]]
		h += w[l[7]]
	}
	for _, k := range l {
		a += w[k]
	}
	return ((a + b) + (c + d)) + ((e + f) + (g + h))
}
