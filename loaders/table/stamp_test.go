package table_test

import (
	"math"
	"testing"
	"time"

	"wavetally/loaders/table"
)

// TestParseStamp compares with package time of the standard library, which reads each form by its own layout.
func TestParseStamp(t *testing.T) {
	for _, test := range []struct {
		text, layout string
		order        table.Order
	}{
		{"2026-03-01T10:20:30Z", time.RFC3339, table.DayFirst},
		{"2026-03-01T10:20:30.123456+02:00", time.RFC3339Nano, table.DayFirst},
		{"2026-03-01T10:20:30-0530", "2006-01-02T15:04:05-0700", table.DayFirst},
		{"2026-03-01T10:20:30+02", "2006-01-02T15:04:05-07", table.DayFirst},
		{"2026-03-01 10:20:30.5", "2006-01-02 15:04:05.9", table.DayFirst},
		{"2026-03-01 10:20:30,5", "2006-01-02 15:04:05,9", table.DayFirst},
		{"2026/3/1 10:20", "2006/1/2 15:04", table.DayFirst},
		{"20260301T102030", "20060102T150405", table.DayFirst},
		{"31.12.2026 23:59:59", "02.01.2006 15:04:05", table.DayFirst},
		{"31.12.2026 23:59:59", "02.01.2006 15:04:05", table.MonthFirst}, // points are day-first everywhere
		{"03/01/2026 10:20:30 PM", "01/02/2006 03:04:05 PM", table.MonthFirst},
		{"03/01/2026 12:20:30 am", "01/02/2006 03:04:05 pm", table.MonthFirst},
		{"3/1/26 12:20:30 PM", "1/2/06 03:04:05 PM", table.MonthFirst},
		{"03/01/2026 10:20:30", "02/01/2006 15:04:05", table.DayFirst},
		{"1-Mar-2026 10:20:30", "2-Jan-2006 15:04:05", table.DayFirst},
		{"01 March 2026 10:20:30.25", "02 January 2006 15:04:05.99", table.DayFirst},
		{"Mar 1, 2026 10:20:30", "Jan 2, 2006 15:04:05", table.DayFirst},
		{"29/02/2028", "02/01/2006", table.DayFirst},
		{"1999-12-31 00:00:00", "2006-01-02 15:04:05", table.DayFirst},
	} {
		want, err := time.Parse(test.layout, test.text)
		if err != nil {
			t.Fatal(err)
		}
		s, ok := table.ParseStamp([]byte(test.text), test.order)
		if nanos := int64(math.Round(s.Frac * 1e9)); !ok || s.Sec != want.Unix() || nanos != int64(want.Nanosecond()) {
			t.Errorf("ParseStamp(%q) is %+v, %v, want %d s and %d ns", test.text, s, ok, want.Unix(), want.Nanosecond())
		}
	}
}

func TestParseStampOfTimeAlone(t *testing.T) {
	for text, want := range map[string]float64{"10:20:30": 37230, "10:20:30.25": 37230.25, "10:20:30:250": 37230.25,
		"1:02:03 PM": 46923, "00:01.5": 1.5, "23:59:60": 86400, "10:20": 37200} {
		s, ok := table.ParseStamp([]byte(text), table.DayFirst)
		if got := float64(s.Sec) + s.Frac; !ok || s.HasDate || got != want {
			t.Errorf("ParseStamp(%q) is %v, %v, want %v s of the day", text, got, ok, want)
		}
	}
}

func TestParseStampRefuses(t *testing.T) {
	for _, text := range []string{"", "1.5", "1234", "1.234.567", "2026-13-01", "30.02.2026", "2026-03-01x", "10:61:00",
		"25:00:00", "abc", "1-2", "V1", "2026-03-01 10:20:30 +25:00", "13:00 PM", "12/31", "1:2:3:4:5"} {
		if s, ok := table.ParseStamp([]byte(text), table.DayFirst); ok {
			t.Errorf("ParseStamp(%q) is %+v, want none", text, s)
		}
	}
}

func TestParseStampKnowsDatesThatTurn(t *testing.T) {
	for text, want := range map[string]bool{"03/04/2026": true, "13/04/2026": false, "04/04/2026": false, "03.04.2026": false, "2026-03-04": false} {
		if s, _ := table.ParseStamp([]byte(text), table.DayFirst); s.Unsure != want {
			t.Errorf("ParseStamp(%q).Unsure is %v, want %v", text, s.Unsure, want)
		}
	}
}
