package spell

import (
	"strconv"
	"time"

	"github.com/apache/arrow/go/v16/arrow"
	"github.com/apache/arrow/go/v16/arrow/array"
)

const (
	dateLayout  = "2006-01-02"
	clockLayout = "15:04:05.999999999"
	localLayout = dateLayout + "T" + clockLayout
	zonedLayout = localLayout + "Z07:00"
	daySeconds  = 24 * 3600

	// From 0000-01-01 to 9999-12-31, in seconds since 1970: RFC 3339 has no other years.
	firstSecond, lastSecond = -62_167_219_200, 253_402_300_799
)

// moment is the speller of an array of timestamps, dates or times of day, nil for another.
func moment(arr arrow.Array) Speller {
	switch a := arr.(type) {
	case *array.Timestamp:
		return timestamp(a)
	case *array.Date32:
		v := a.Date32Values()
		return func(dst []byte, i int) ([]byte, bool) {
			return at(dst, int64(v[i])*daySeconds, 0, int64(v[i]), time.UTC, dateLayout), false
		}
	case *array.Date64:
		v := a.Date64Values()
		return func(dst []byte, i int) ([]byte, bool) {
			layout := dateLayout
			if v[i]%(1000*daySeconds) != 0 {
				layout = localLayout
			}
			return at(dst, int64(v[i])/1000, int64(v[i])%1000*1e6, int64(v[i]), time.UTC, layout), false
		}
	case *array.Time32:
		v, unit := a.Time32Values(), int64(a.DataType().(*arrow.Time32Type).Unit.Multiplier())
		return func(dst []byte, i int) ([]byte, bool) { return clock(dst, int64(v[i]), unit), false }
	case *array.Time64:
		v, unit := a.Time64Values(), int64(a.DataType().(*arrow.Time64Type).Unit.Multiplier())
		return func(dst []byte, i int) ([]byte, bool) { return clock(dst, int64(v[i]), unit), false }
	}
	return nil
}

// timestamp: moments with a zone are kept in UTC and written in their zone; when it is not known here, in UTC.
func timestamp(a *array.Timestamp) Speller {
	dt := a.DataType().(*arrow.TimestampType)
	v, layout, zone := a.TimestampValues(), localLayout, time.UTC
	if dt.TimeZone != "" {
		layout = zonedLayout
		if z, err := dt.GetZone(); err == nil {
			zone = z
		}
	}
	perSecond := int64(time.Second / dt.Unit.Multiplier())
	return func(dst []byte, i int) ([]byte, bool) {
		s, rest := int64(v[i])/perSecond, int64(v[i])%perSecond
		return at(dst, s, rest*int64(dt.Unit.Multiplier()), int64(v[i]), zone, layout), false
	}
}

// at appends a moment, or its count of units when the format has no words for it. Where the zone is off by seconds, as
// before about 1900, it is UTC.
func at(dst []byte, seconds, nanos, count int64, zone *time.Location, layout string) []byte {
	if seconds <= firstSecond+daySeconds || seconds >= lastSecond-daySeconds { // a day for the zone
		return strconv.AppendInt(dst, count, 10)
	}
	t := time.Unix(seconds, nanos).In(zone)
	if _, offset := t.Zone(); offset%60 != 0 {
		t = t.UTC()
	}
	return t.AppendFormat(dst, layout)
}

// clock appends a time of day; counts beyond a day, which mean none, stay counts.
func clock(dst []byte, v, unit int64) []byte {
	if v < 0 || v >= daySeconds*int64(time.Second)/unit {
		return strconv.AppendInt(dst, v, 10)
	}
	return time.Unix(0, v*unit).UTC().AppendFormat(dst, clockLayout)
}

// interval is the speller of an array of intervals of the calendar, nil for another.
func interval(arr arrow.Array) Speller {
	part := func(dst []byte, name string, v int64) []byte {
		return strconv.AppendInt(append(dst, name...), v, 10)
	}
	switch a := arr.(type) {
	case *array.MonthInterval:
		return func(dst []byte, i int) ([]byte, bool) { return strconv.AppendInt(dst, int64(a.Value(i)), 10), false }
	case *array.DayTimeInterval:
		return func(dst []byte, i int) ([]byte, bool) {
			v := a.Value(i)
			dst = part(dst, `{"days":`, int64(v.Days))
			return append(part(dst, `,"milliseconds":`, int64(v.Milliseconds)), '}'), false
		}
	case *array.MonthDayNanoInterval:
		return func(dst []byte, i int) ([]byte, bool) {
			v := a.Value(i)
			dst = part(dst, `{"months":`, int64(v.Months))
			dst = part(dst, `,"days":`, int64(v.Days))
			return append(part(dst, `,"nanoseconds":`, v.Nanoseconds), '}'), false
		}
	}
	return nil
}
