//go:build !amd64

package fresh

func (k *Kernel) distances(dst, u []float32) { distancesPlain(dst, k.norm, k.across, u) }

func (k *Kernel) decays(dst []float32, add float32) { decaysPlain(dst, add, &k.series) }
