package forest

// bag is the share of rows a tree is grown on: that of the distinct rows in a bootstrap sample.
const bag float64 = 0.632

// InBag tells whether a row with this key is in the bag of t, if it was there to be drawn when t was grown.
func (t *Tree) InBag(key uint64) bool { return t.outOfBag(key) == 0 }

// outOfBag is 1 for a row with this key that is not in the bag of t, else 0.
func (t *Tree) outOfBag(key uint64) uint64 {
	x := key ^ t.Seed
	x = (x ^ x>>32) * 0xd6e8feb86659fd93
	x = (x ^ x>>32) * 0xd6e8feb86659fd93
	x ^= x >> 32
	const parts = 1 << 53
	return 1 - (x>>11-uint64(bag*parts))>>63
}

// blockRows is how many rows vote in one tree before the next tree comes: their leaf ids stay in the cache meanwhile.
const blockRows = 256

// VoteOutOfBag writes to dst (len(at)·Classes) the mean class shares in the leaves of the rows at, over the trees whose
// bag a row with its key is not in. A row that is in every bag gets 1/Classes for each class. leaves holds the leaf ids of
// all rows, trees side by side; keys has one key an entry of at.
func (f *Forest) VoteOutOfBag(leaves []int32, at []int32, keys []uint64, dst []float64) {
	clear(dst)
	k := f.Classes
	var votes [blockRows]int32
	for lo := 0; lo < len(at); lo += blockRows {
		hi := min(lo+blockRows, len(at))
		clear(votes[:])
		for t := range f.Trees {
			f.voteTree(t, leaves, at[lo:hi], keys[lo:hi], dst[lo*k:hi*k], votes[:hi-lo])
		}
		for i, n := range votes[:hi-lo] {
			share := dst[(lo+i)*k : (lo+i+1)*k]
			for c := range share {
				if n == 0 {
					share[c] = 1 / float64(k)
				} else {
					share[c] /= float64(n)
				}
			}
		}
	}
}

// voteTree adds tree t's class shares to dst, and one to votes, for the rows at that are not in its bag.
func (f *Forest) voteTree(t int, leaves, at []int32, keys []uint64, dst []float64, votes []int32) {
	tree, k, trees, first := f.Trees[t], f.Classes, len(f.Trees), f.First[t]
	for i, r := range at {
		out := tree.outOfBag(keys[i]) // a factor, because a branch would often be foretold wrong
		votes[i] += int32(out)
		l := int(leaves[int(r)*trees+t] - first)
		to := dst[i*k : (i+1)*k]
		for c, s := range tree.Shares[l*k : (l+1)*k] {
			to[c] += float64(s) * float64(out)
		}
	}
}
