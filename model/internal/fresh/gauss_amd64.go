package fresh

// distances is distancesPlain, four numbers at a time.
//
//go:noescape
func distances(dst, norm, across, u *float32, blocks, dim int)

// decays is decaysPlain for n numbers, n a multiple of four.
//
//go:noescape
func decays(dst *float32, add float32, n int, series *[10]float32)

func (k *Kernel) distances(dst, u []float32) {
	distances(&dst[0], &k.norm[0], &k.across[0], &u[0], len(dst)/wide, k.Dim)
}

func (k *Kernel) decays(dst []float32, add float32) {
	decays(&dst[0], add, len(dst), &k.series)
}
