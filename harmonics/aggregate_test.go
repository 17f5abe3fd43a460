package harmonics_test

import (
	"errors"
	"math"
	"reflect"
	"testing"
	"time"

	"wavetally/harmonics"
	"wavetally/harmonics/site"
	"wavetally/harmonics/synth"
)

// slowRate keeps long recordings cheap: enough for order 9 at 50 Hz.
const slowRate = 1200

// Windows restart at each 10 min mark of UTC; the one that straddles it is kept (IEC 61000-4-30:2015, 4.5, from memory).
func TestIntervalsFollowTheClock(t *testing.T) {
	start := time.Date(2026, 3, 1, 10, 8, 30, 250e6, time.UTC) // 89.75 s before a mark
	r := synth.Recording{Rate: slowRate, Seconds: 2000, Start: start, Frequency: synth.Frequency{Hz: 50.013}, Channels: []synth.Channel{
		{Name: "V1", Unit: "V", Harmonics: []synth.Harmonic{{Order: 1, RMS: 230}, {Order: 3, RMS: 5}}}}}
	s := measure(t, r, sheetFor(50, "V1"))
	if len(s.Tens) != 5 {
		t.Fatalf("%d intervals, want a part, three whole ones and a part", len(s.Tens))
	}
	for i, v := range s.Tens {
		whole := i >= 1 && i <= 3
		if v.Complete != whole || v.Valid() != whole {
			t.Errorf("interval %d: complete %v, want %v (%d of %d windows)", i, v.Complete, whole, v.Windows, v.Want)
		}
		if !whole {
			continue
		}
		if want := 89.75 + 600*float64(i-1); math.Abs(v.At-want) > 1e-6 {
			t.Errorf("interval %d begins at %.6f s, want the mark at %.6f s", i, v.At, want)
		}
		// 600 s of windows of 10/50.013 s: 3000.78 of them, the last straddling the mark.
		if v.Windows != 3001 || v.Span < 600 || v.Span > 600.2 {
			t.Errorf("interval %d: %d windows over %.3f s, want 3001 over just more than 600 s", i, v.Windows, v.Span)
		}
		if got := v.Channels[0].H[3]; math.Abs(got-5) > 1e-4 {
			t.Errorf("interval %d: third harmonic %.6f V, want 5", i, got)
		}
	}
	if n := s.Channels[0].H(3).Share10m.N; n != 3 {
		t.Errorf("statistics over %d intervals, want the 3 whole ones", n)
	}
}

// Aggregation is by root of the mean square. The worked value is IEC 61000-4-30's rule on nine windows of 230 V and six
// of 231 V: 230.400521 V (standards.md 5.5).
func TestAggregateIsRootMeanSquare(t *testing.T) {
	r := synth.Recording{Rate: 6400, Seconds: 3.05, Frequency: synth.Frequency{Hz: 50}, Channels: []synth.Channel{
		{Name: "V1", Unit: "V", Harmonics: []synth.Harmonic{{Order: 1, RMS: 230}},
			Load: func(t float64) float64 {
				if t > 1.8+0.0035 { // windows begin some samples after the recording does
					return 231.0 / 230
				}
				return 1
			}}}}
	s := measure(t, r, sheetFor(50, "V1"))
	if len(s.Threes) != 1 {
		t.Fatalf("%d 3 s intervals, want 1", len(s.Threes))
	}
	if got := s.Threes[0].Channels[0].RMS; math.Abs(got-230.400521) > 0.002 {
		t.Errorf("nine windows at 230 V and six at 231 V: %.6f V, want 230.400521", got)
	}
}

// A day without gap is 144 intervals of 10 min and 28 800 of 3 s, whatever the frequency does, below 50 Hz, above it and
// passing through it; seven of them are the 1008 values of a week.
func TestADayIsWhole(t *testing.T) {
	r := synth.Recording{Rate: 300, Seconds: 86400, Start: time.Date(2026, 3, 2, 0, 0, 0, 0, time.UTC),
		Frequency: synth.Frequency{Hz: 50, Wander: []synth.Wander{{Hz: 0.05, Period: 86400}, {Hz: 0.03, Period: 3600}}},
		Channels:  []synth.Channel{{Name: "V1", Unit: "V", Harmonics: []synth.Harmonic{{Order: 1, RMS: 230}}}}}
	s := measure(t, r, sheetFor(50, "V1"))
	valid := 0
	for _, v := range s.Tens {
		if v.Valid() {
			valid++
		}
	}
	if valid != 1008/7 || len(s.Tens) != valid {
		t.Errorf("%d intervals, %d of them valid, want 144", len(s.Tens), valid)
	}
	if len(s.Days) != 1 || s.Days[0].N < 28799 || s.Days[0].N > 28800 {
		t.Errorf("days %d, with %d values of 3 s; want one with 28 800, or one less where the recording ends", len(s.Days), s.Days[0].N)
	}
	if f := s.Frequency; f.Min > 49.93 || f.Max < 50.07 {
		t.Errorf("the frequency went from %v to %v Hz only", f.Min, f.Max)
	}
}

// A gap is kept and flagged, never filled: the interval it falls into is not complete, the others are.
func TestGapSpoilsItsIntervalOnly(t *testing.T) {
	r := synth.Recording{Rate: slowRate, Seconds: 1800, Frequency: synth.Frequency{Hz: 50}, Gaps: []synth.Span{{At: 700, Length: 0.5}},
		Channels: []synth.Channel{{Name: "V1", Unit: "V", Harmonics: []synth.Harmonic{{Order: 1, RMS: 230}}}}}
	s := measure(t, r, sheetFor(50, "V1"))
	var got []bool
	for _, v := range s.Tens {
		got = append(got, v.Valid())
	}
	if want := []bool{true, false, true}; !reflect.DeepEqual(got, want) {
		t.Errorf("intervals valid: %v, want %v", got, want)
	}
	if len(s.Gaps) != 1 || math.Abs(s.Gaps[0].At-700) > 0.001 || math.Abs(s.Gaps[0].Length-0.5) > 0.001 {
		t.Errorf("gaps %v, want one of 0.5 s at 700 s", s.Gaps)
	}
}

// Missing samples flag their window, and leave its neighbours alone.
func TestMissingSamplesFlagTheirWindow(t *testing.T) {
	r := synth.Recording{Rate: 6400, Seconds: 6.5, Frequency: synth.Frequency{Hz: 50.02}, Channels: []synth.Channel{
		{Name: "V1", Unit: "V", Harmonics: distorted(230), Missing: []synth.Span{{At: 2.41, Length: 0.001}}},
		{Name: "I1", Unit: "A", Harmonics: distorted(10), Missing: []synth.Span{{At: 4.5, Length: 0.001}}}}}
	s := measure(t, r, sheetFor(50, "V1", "I1"))
	if s.Windows.Flagged != 1 {
		t.Errorf("%d windows flagged, want the one with the reference's missing samples", s.Windows.Flagged)
	}
	for k, c := range s.Channels {
		for _, w := range r.Channels[k].Harmonics {
			if e := math.Abs(c.H(w.Order).RMS - w.RMS); e > boundOfFundamental/100*r.Channels[k].Harmonics[0].RMS {
				t.Errorf("%s: order %d is off by %g", c.Role, w.Order, e)
			}
		}
		if s.Facts[k].Missing < 6 {
			t.Errorf("%s: %d missing samples reported, want 6 or 7", c.Role, s.Facts[k].Missing)
		}
	}
	if s.Threes[0].Valid() || !math.IsNaN(s.Threes[1].Channels[1].RMS) {
		t.Errorf("an interval with missing samples is taken as whole")
	}
}

// Results do not depend on the number of workers, to the last bit.
func TestSameOnAnyNumberOfCores(t *testing.T) {
	r := synth.Recording{Rate: 12800, Seconds: 20, Frequency: synth.Frequency{Hz: 50.1, Ramp: 0.01}, Seed: 3, Channels: []synth.Channel{
		{Name: "V1", Unit: "V", Harmonics: distorted(230), Noise: 1}, {Name: "V2", Unit: "V", Harmonics: distorted(231), Noise: 1},
		{Name: "I1", Unit: "A", Harmonics: distorted(10), Noise: 0.1, Skew: 3e-6}}}
	var first *harmonics.Summary
	for _, workers := range []int{1, 2, 3, 7} {
		s, err := harmonics.Measure(t.Context(), synth.New(r), sheetFor(50, "V1", "V2", "I1"), harmonics.Options{Workers: workers})
		if err != nil {
			t.Fatal(err)
		}
		if first == nil {
			first = s
		} else if !same(reflect.ValueOf(first), reflect.ValueOf(s)) {
			t.Errorf("%d workers give another result than 1", workers)
		}
	}
}

// same is reflect.DeepEqual with NaN equal to itself.
func same(a, b reflect.Value) bool {
	switch a.Kind() {
	case reflect.Float64:
		return a.Float() == b.Float() || math.IsNaN(a.Float()) && math.IsNaN(b.Float())
	case reflect.Complex128:
		return a.Complex() == b.Complex()
	case reflect.Pointer:
		if a.IsNil() || b.IsNil() {
			return a.IsNil() && b.IsNil()
		}
		return same(a.Elem(), b.Elem())
	case reflect.Slice, reflect.Array:
		if a.Len() != b.Len() {
			return false
		}
		for i := range a.Len() {
			if !same(a.Index(i), b.Index(i)) {
				return false
			}
		}
		return true
	case reflect.Struct:
		if a.Type() == reflect.TypeFor[time.Time]() {
			return true
		}
		for i := range a.NumField() {
			if !same(a.Field(i), b.Field(i)) {
				return false
			}
		}
		return true
	}
	return a.Equal(b)
}

// Channels sampled one after the other are brought to the same instant.
func TestSkewIsTakenOut(t *testing.T) {
	hs := distorted(10)
	r := synth.Recording{Rate: 12800, Seconds: 3, Frequency: synth.Frequency{Hz: 50}, Channels: []synth.Channel{
		{Name: "V1", Unit: "V", Harmonics: distorted(230)}, {Name: "I1", Unit: "A", Harmonics: hs, Skew: 20e-6}}}
	s := measure(t, r, sheetFor(50, "V1", "I1"))
	for _, w := range hs {
		// Uncorrected, 20 µs would turn order 25 by 9°.
		turn := math.Mod(s.Channels[1].H(w.Order).Angle-w.Angle+540, 360) - 180
		if math.Abs(turn) > boundAngle*float64(w.Order) {
			t.Errorf("order %d is turned by %.4f°", w.Order, turn)
		}
	}
}

// A capture shorter than a window is measured over its whole cycles, lines alone.
func TestShortCaptures(t *testing.T) {
	for _, cycles := range []float64{1, 2.3, 3, 5.5, 9.9} {
		hz := 50.2
		if cycles == 1 {
			hz = 50 // nothing repeats: the length of the cycle has to be taken as nominal
		}
		r := synth.Recording{Rate: 20000, Seconds: cycles / hz, Frequency: synth.Frequency{Hz: hz}, Channels: []synth.Channel{
			{Name: "V1", Unit: "V", Harmonics: distorted(230)}, {Name: "I1", Unit: "A", Harmonics: distorted(5)}}}
		s := measure(t, r, sheetFor(50, "V1", "I1"))
		if !s.LinesOnly || s.Windows.Cycles != int(cycles+0.01) || s.Windows.Total != 1 {
			t.Errorf("%g cycles: lines only %v, %d cycles in %d windows", cycles, s.LinesOnly, s.Windows.Cycles, s.Windows.Total)
		}
		if math.Abs(s.Frequency.Mean-hz) > 0.01 {
			t.Errorf("%g cycles: %.4f Hz, want %.4f", cycles, s.Frequency.Mean, hz)
		}
		for k, c := range s.Channels {
			for _, w := range r.Channels[k].Harmonics {
				if e := 100 * math.Abs(c.H(w.Order).RMS-w.RMS) / r.Channels[k].Harmonics[0].RMS; e > 0.02 {
					t.Errorf("%g cycles: %s order %d is off by %.4f %% of the fundamental", cycles, c.Role, w.Order, e)
				}
			}
		}
		if len(s.Threes)+len(s.Tens) > 0 || s.Channels[0].H(5).Share3s.N > 0 {
			t.Errorf("%g cycles: there are statistics of 3 s or 10 min values", cycles)
		}
	}
	r := synth.Recording{Rate: 20000, Seconds: 0.012, Frequency: synth.Frequency{Hz: 50}, Channels: []synth.Channel{{Name: "V1", Unit: "V", Harmonics: distorted(230)}}}
	if _, err := harmonics.Measure(t.Context(), synth.New(r), sheetFor(50, "V1"), harmonics.Options{}); !errors.Is(err, harmonics.ErrTooShort) {
		t.Errorf("half a cycle: %v, want %v", err, harmonics.ErrTooShort)
	}
}

// Just ten cycles, a common length for an export, make a whole window.
func TestTenCyclesAreAWindow(t *testing.T) {
	r := synth.Recording{Rate: 10000, Seconds: 0.2, Frequency: synth.Frequency{Hz: 50}, Channels: []synth.Channel{{Name: "V1", Unit: "V", Harmonics: distorted(230)}}}
	s := measure(t, r, sheetFor(0, "V1"))
	if s.LinesOnly || s.Windows.Cycles != 10 || s.Nominal != 50 {
		t.Errorf("200 ms: lines only %v, %d cycles, nominal %g Hz", s.LinesOnly, s.Windows.Cycles, s.Nominal)
	}
}

// A dip flags its windows, which leave the statistics alone and are counted.
func TestDipFlagsItsWindows(t *testing.T) {
	sheet := sheetFor(50, "V1", "V2", "V3")
	sheet.Supply.Connection, sheet.Supply.NominalVoltage = site.Wye4, 230*math.Sqrt(3)
	r := synth.Recording{Rate: 6400, Seconds: 9, Frequency: synth.Frequency{Hz: 50}, Channels: []synth.Channel{
		{Name: "V1", Unit: "V", Harmonics: distorted(230)},
		{Name: "V2", Unit: "V", Harmonics: synth.Delayed(distorted(230), 1.0/3), Dips: []synth.Dip{{At: 4.03, Length: 0.1, Depth: 0.4}}},
		{Name: "V3", Unit: "V", Harmonics: synth.Delayed(distorted(230), 2.0/3), Dips: []synth.Dip{{At: 6, Length: 0.2, Depth: -0.15}}}}}
	s := measure(t, r, sheet)
	if len(s.Events) != 2 {
		t.Fatalf("events %+v, want a dip and a swell", s.Events)
	}
	dip, swell := s.Events[0], s.Events[1]
	// One half cycle is the resolution; the rms over a cycle sees an edge up to a cycle late.
	if dip.Kind != harmonics.Dip || math.Abs(dip.At-4.03) > 0.021 || math.Abs(dip.Length-0.1) > 0.021 || math.Abs(dip.Share-60*1.028) > 1.5 {
		t.Errorf("dip %+v, want 60 %% from 4.03 s for 0.1 s", dip)
	}
	if swell.Kind != harmonics.Swell || math.Abs(swell.At-6) > 0.021 || math.Abs(swell.Share-115*1.028) > 1.5 {
		t.Errorf("swell %+v, want 115 %% from 6 s", swell)
	}
	if s.Windows.Flagged < 2 || s.Windows.Flagged > 4 {
		t.Errorf("%d windows flagged, want those of the dip and the swell", s.Windows.Flagged)
	}
	if got := s.Channels[1].Fundamental; math.Abs(got-230) > 0.01 {
		t.Errorf("fundamental of the channel with the dip is %.4f V, want 230 without the flagged windows", got)
	}
	for _, v := range s.Threes {
		if dirty := v.Flags != 0; dirty == v.Valid() {
			t.Errorf("3 s interval at %.1f s: flags %v, valid %v", v.At, v.Flags.Strings(), v.Valid())
		}
	}
}
