package filter

import "fmt"

// notes tells what the reader of the report should know of the window.
func (s *slide) notes() []string {
	var list []string
	st := s.win.Stats()
	if st.Limit < s.s.Config.Records && st.Arrived > int64(st.Limit) {
		list = append(list, fmt.Sprintf("the window holds %d rows, not %d, because of window.bytes", st.Limit, s.s.Config.Records))
	}
	if st.Late > 0 {
		list = append(list, fmt.Sprintf("%d rows came later than window.span allows and were not trained on", st.Late))
	}
	if st.Ahead > 0 {
		list = append(list, fmt.Sprintf("%d rows have a time more than window.span ahead of the others; they count as of the present", st.Ahead))
	}
	return list
}
