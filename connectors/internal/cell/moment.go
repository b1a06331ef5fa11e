package cell

import "time"

// Style is how a moment is written.
type Style uint8

// Styles.
const (
	NoMoment Style = iota
	Date           // 2026-05-01
	Local          // 2026-05-01T07:30:00.25, without a zone
	Zoned          // 2026-05-01T07:30:00.25+02:00, or Z
)

// Moment reads a date, or a date and a time of day, as RFC 3339 and ISO 8601 write them: T or a blank between the two,
// seconds and at most nine digits behind them if wanted, and Z or ±hh, ±hhmm, ±hh:mm for the zone. Without a zone it is
// UTC. It gives seconds since 1970 and nanoseconds on top, and the digits behind the second.
func Moment(b []byte) (seconds int64, nanos int32, digits int, style Style) {
	s := scanner{b: trim(b), ok: true}
	year := s.number(4, 0, 9999)
	s.expect('-')
	month := s.number(2, 1, 12)
	s.expect('-')
	day := s.number(2, 1, 31)
	if !s.ok || day > daysIn(year, month) {
		return 0, 0, 0, NoMoment
	}
	seconds = time.Date(year, time.Month(month), day, 0, 0, 0, 0, time.UTC).Unix()
	if len(s.b) == 0 {
		return seconds, 0, 0, Date
	}
	if c := s.b[0]; c != 'T' && c != 't' && c != ' ' {
		return 0, 0, 0, NoMoment
	}
	s.b = s.b[1:]
	seconds += 3600 * int64(s.number(2, 0, 23))
	s.expect(':')
	seconds += 60 * int64(s.number(2, 0, 59))
	if s.next(':') {
		seconds += int64(s.number(2, 0, 59))
		nanos, digits = s.fraction()
	}
	style = Local
	if len(s.b) > 0 {
		style = Zoned
		seconds -= s.zone()
	}
	if !s.ok || len(s.b) > 0 {
		return 0, 0, 0, NoMoment
	}
	return seconds, nanos, digits, style
}

func daysIn(year, month int) int {
	switch month {
	case 2:
		if year%4 == 0 && (year%100 != 0 || year%400 == 0) {
			return 29
		}
		return 28
	case 4, 6, 9, 11:
		return 30
	}
	return 31
}

// scanner takes parts off the front of b while ok holds.
type scanner struct {
	b  []byte
	ok bool
}

// number takes so many digits, whose number must lie from lo to hi.
func (s *scanner) number(digits, lo, hi int) int {
	if len(s.b) < digits {
		s.ok = false
		return lo
	}
	v := 0
	for _, c := range s.b[:digits] {
		if c < '0' || c > '9' {
			s.ok = false
			return lo
		}
		v = 10*v + int(c-'0')
	}
	s.b = s.b[digits:]
	s.ok = s.ok && lo <= v && v <= hi
	return v
}

// next takes c if it comes next.
func (s *scanner) next(c byte) bool {
	if len(s.b) == 0 || s.b[0] != c {
		return false
	}
	s.b = s.b[1:]
	return true
}

func (s *scanner) expect(c byte) {
	if !s.next(c) {
		s.ok = false
	}
}

// fraction takes what stands behind a second.
func (s *scanner) fraction() (nanos int32, digits int) {
	if !s.next('.') {
		return 0, 0
	}
	for len(s.b) > 0 && s.b[0] >= '0' && s.b[0] <= '9' {
		if digits++; digits > 9 {
			s.ok = false
			return 0, 0
		}
		nanos = 10*nanos + int32(s.b[0]-'0')
		s.b = s.b[1:]
	}
	s.ok = s.ok && digits > 0
	for range 9 - digits {
		nanos *= 10
	}
	return nanos, digits
}

// zone takes Z or an offset, in seconds east.
func (s *scanner) zone() int64 {
	sign := int64(1)
	switch {
	case s.next('Z'), s.next('z'):
		return 0
	case s.next('-'):
		sign = -1
	default:
		s.expect('+')
	}
	offset := 3600 * int64(s.number(2, 0, 23))
	if colon := s.next(':'); colon || len(s.b) > 0 {
		offset += 60 * int64(s.number(2, 0, 59))
	}
	return sign * offset
}
