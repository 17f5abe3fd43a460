package report_test

import (
	"math"
	"testing"
	"time"

	"wavetally/report"
)

func TestSig(t *testing.T) {
	for _, c := range []struct {
		in   float64
		want string
	}{
		{0, "0"}, {math.NaN(), "–"}, {math.Inf(1), "–"}, {4.8, "4.8"}, {4.804, "4.8"}, {4.805, "4.8"}, {4.806, "4.81"},
		{9.994, "9.99"}, {9.996, "10"}, {math.Nextafter(9.995, 0), "9.99"}, {99.95, "100"}, {999.4, "999"}, {999.6, "1000"}, {12345.6, "12346"},
		{0.00123456, "0.00123"}, {-0.0456, "-0.0456"}, {100, "100"}, {1e-9, "0.000000001"},
	} {
		if got := report.Sig(c.in); got != c.want {
			t.Errorf("%v is %q, want %q", c.in, got, c.want)
		}
	}
}

func TestApart(t *testing.T) {
	for _, c := range []struct {
		a, b         float64
		wantA, wantB string
	}{
		{5.004, 5, "5.004", "5"}, {4.8, 5, "4.8", "5"}, {5, 5, "5", "5"}, {5.0000001, 5, "5", "5"}, {0.50004, 0.5, "0.50004", "0.5"}, {math.NaN(), 5, "–", "5"},
	} {
		if a, b := report.Apart(c.a, c.b); a != c.wantA || b != c.wantB {
			t.Errorf("%v and %v are %q and %q", c.a, c.b, a, b)
		}
	}
}

func TestQuantity(t *testing.T) {
	for _, c := range []struct {
		v    float64
		unit string
		want string
	}{
		{12500, "A", "12.5 kA"}, {999, "V", "999 V"}, {1000, "V", "1 kV"}, {math.Nextafter(1000, 0), "V", "1000 V"}, {0.0123, "A", "12.3 mA"}, {-4200, "W", "-4.2 kW"},
		{4.8, "%", "4.8 %"}, {12000, "%", "12000 %"}, {0, "V", "0 V"}, {math.NaN(), "V", "not measured"}, {30.4878, "", "30.5"}, {2e-8, "A", "0.02 µA"}, {630000, "VA", "630 kVA"},
	} {
		if got := report.Quantity(c.v, c.unit); got != c.want {
			t.Errorf("%v %s is %q, want %q", c.v, c.unit, got, c.want)
		}
	}
}

func TestDuration(t *testing.T) {
	for _, c := range []struct {
		in   float64
		want string
	}{
		{0, "0 s"}, {0.0504, "0.0504 s"}, {59.9, "59.9 s"}, {60, "1 min"}, {math.Nextafter(60, 0), "60 s"}, {61.4, "1 min 1 s"}, {3599.6, "1 h"}, {5400, "1 h 30 min"}, {86400, "1 d"},
		{86405, "1 d"}, {604800, "7 d"}, {608400, "7 d 1 h"}, {1512.4, "25 min 12 s"}, {math.NaN(), "an unknown time"},
	} {
		if got := report.Duration(c.in); got != c.want {
			t.Errorf("%v s is %q, want %q", c.in, got, c.want)
		}
	}
}

func TestClock(t *testing.T) {
	start := time.Date(2026, 3, 29, 0, 59, 50, 0, time.UTC)
	r := report.Recording{Start: &start}
	if got := r.Clock(20); got != "2026-03-29 01:00:10 UTC" {
		t.Error(got)
	}
	east := start.In(time.FixedZone("", 5*3600+1800))
	r.Start = &east
	if got := r.Clock(20); got != "2026-03-29 06:30:10 +05:30" {
		t.Error(got)
	}
	if got := (report.Recording{}).Clock(90); got != "at 1 min 30 s" {
		t.Error(got)
	}
}

func TestRuleTitle(t *testing.T) {
	for in, want := range map[string]string{"ieee-519-2022": "IEEE 519-2022", "en-50160": "EN 50160", "iec-61000-2-2": "IEC 61000-2-2",
		"iec-61000-2-4-class2": "IEC 61000-2-4 class 2", "our-own": "our-own", "limits.toml": "limits.toml", "": ""} {
		if got := report.RuleTitle(in); got != want {
			t.Errorf("%q is %q, want %q", in, got, want)
		}
	}
}

func TestShortStatistic(t *testing.T) {
	for in, want := range map[string]string{
		"95th percentile of 10 min values over a week": "P95 of 10 min, week",
		"99th percentile of 3 s values over a day":     "P99 of 3 s, day",
		"maximum of 10 min values":                     "maximum of 10 min values",
	} {
		if got := report.ShortStatistic(in); got != want {
			t.Errorf("%q is %q, want %q", in, got, want)
		}
	}
}
