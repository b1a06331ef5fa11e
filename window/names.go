package window

import "slices"

// names is a list of class, source or level names that only grows, and the way from the codes of the table that is
// being appended to its own codes. Within a run the two are the same and nothing is copied; a window restored into
// another run may meet the same names in another order.
type names struct {
	list []string // own names by own code; shared with the tables as long as codes is nil
	last []string // the table's list seen last
	own  []int32  // own code of each code of last; nil: the same
}

// adopt takes over the list of the next table.
func (n *names) adopt(list []string) {
	if len(list) == len(n.last) && (len(list) == 0 || &list[0] == &n.last[0]) {
		return
	}
	if n.own == nil && len(list) >= len(n.list) && slices.Equal(list[:len(n.list)], n.list) {
		n.list, n.last = slices.Clip(list), list
		return
	}
	code := make(map[string]int32, len(n.list))
	for i, s := range n.list {
		code[s] = int32(i)
	}
	n.own, n.last = make([]int32, len(list)), list
	for i, s := range list {
		c, ok := code[s]
		if !ok {
			c = int32(len(n.list))
			code[s] = c
			n.list = append(n.list, s)
		}
		n.own[i] = c
	}
}

// code gives the own code of a code of the table seen last; −1 stays −1.
func (n *names) code(c int32) int32 {
	if n.own == nil || c < 0 {
		return c
	}
	return n.own[c]
}
