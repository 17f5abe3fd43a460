package timebase_test

import (
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"wavetally/loaders/timebase"
)

// stamps makes the points of rows sampled at rate and stamped with a resolution, cut off or rounded.
func stamps(rate, step float64, rows int, round func(float64) float64) []timebase.Point {
	points := make([]timebase.Point, rows)
	for i := range points {
		points[i] = timebase.Point{Row: int64(i), T: round(float64(i)/rate/step) * step, Step: step}
	}
	return points
}

// TestRatesThatInstrumentsUse takes rates as instruments have them, whole numbers or whole intervals, from stamps as
// coarse as dozens of samples: the rate must come out exactly.
func TestRatesThatInstrumentsUse(t *testing.T) {
	for _, rate := range []float64{1000, 2000, 3200, 4000, 5000, 6400, 7680, 10000, 12800, 15360, 20000, 25600, 44100, 48000, 51200, 100000, 1e6, 1 / 3e-4, 1 / 7e-5} {
		for _, step := range []float64{1e-9, 1e-7, 1e-6, 1e-5, 1e-4, 1e-3} {
			for name, round := range map[string]func(float64) float64{"rounded": math.Round, "cut off": math.Floor} {
				points := stamps(rate, step, 20_000, round)
				fit, err := timebase.From(points, 0)
				if step*rate > 40 && err != nil {
					continue // too coarse for so few rows, and it says so
				}
				if err != nil {
					t.Errorf("%g Hz, stamps %s to %g s: %v", rate, name, step, err)
					continue
				}
				// The exact rate must be possible, and taken wherever the stamps pin it to better than one in 10 000.
				if fit.Low > (1+1e-9)/rate || fit.Top < (1-1e-9)/rate {
					t.Errorf("%g Hz, stamps %s to %g s: range %.9g to %.9g Hz leaves it out", rate, name, step, 1/fit.Top, 1/fit.Low)
				}
				if got := fit.Rate(); fit.Uncertainty() < 1e-4 && math.Abs(got-rate) > 1e-9*rate {
					t.Errorf("%g Hz, stamps %s to %g s: found %.9g ± %.2g %%", rate, name, step, got, fit.Uncertainty()*100)
				}
			}
		}
	}
}

// TestRatesOfNoRoundNumber must not be bent to a round number that the stamps contradict.
func TestRatesOfNoRoundNumber(t *testing.T) {
	random := rand.New(rand.NewPCG(3, 4))
	for range 50 {
		rate := 1000 + 20000*random.Float64()
		fit, err := timebase.From(stamps(rate, 1e-6, 50_000, math.Round), 0)
		if err != nil {
			t.Fatal(err)
		}
		if got := fit.Rate(); math.Abs(got-rate) > 1e-6/(50_000/rate)*rate {
			t.Errorf("%.9g Hz is found as %.9g", rate, got)
		}
	}
}

func TestStampsThroughSinglePrecision(t *testing.T) {
	const rate, origin = 12800.0, 40.0
	points := make([]timebase.Point, 20_000)
	for i := range points {
		points[i] = timebase.Point{Row: int64(i), T: float64(float32(origin+float64(i)/rate)) - origin, Step: 1e-7}
	}
	fit, err := timebase.From(points, origin)
	if err != nil || fit.Rate() != rate || fit.Jitter != 0 {
		t.Errorf("found %v with jitter %v, %v, want %v", fit.Rate(), fit.Jitter, err, rate)
	}
}

func TestJitterIsAveraged(t *testing.T) {
	random := rand.New(rand.NewPCG(5, 6))
	const rate = 4000.0
	points := make([]timebase.Point, 40_000)
	for i := range points {
		points[i] = timebase.Point{Row: int64(i), T: float64(i)/rate + 1e-3*random.NormFloat64(), Step: 1e-6}
	}
	fit, err := timebase.From(points, 0)
	if err != nil || math.Abs(fit.Rate()-rate) > 1e-5*rate || fit.Jitter < 1e-3 {
		t.Errorf("found %v with jitter %v, %v, want %v", fit.Rate(), fit.Jitter, err, rate)
	}
}

func TestGapsDoNotBendTheRate(t *testing.T) {
	points := stamps(5000, 1e-4, 20_000, math.Floor)
	for i := range points {
		points[i].T += math.Floor(float64(i)/4500) * 3600.5
	}
	fit, err := timebase.From(points, 0)
	if err != nil || fit.Rate() != 5000 {
		t.Errorf("found %v, %v, want 5000", fit.Rate(), err)
	}
}

func TestStampsThatTellNoRate(t *testing.T) {
	if _, err := timebase.From(stamps(1000, 1e-6, 2, math.Round), 0); !errors.Is(err, timebase.ErrTooFew) {
		t.Errorf("two stamps give %v", err)
	}
	if _, err := timebase.From(stamps(1000, 100, 500, math.Floor), 0); !errors.Is(err, timebase.ErrStanding) {
		t.Errorf("standing stamps give %v", err)
	}
	random := rand.New(rand.NewPCG(7, 8))
	points := stamps(1000, 1e-6, 500, math.Round)
	for i := range points {
		points[i].T = random.Float64()
	}
	if fit, err := timebase.From(points, 0); err == nil {
		t.Errorf("stamps at random give %+v", fit)
	}
}

func TestSure(t *testing.T) {
	for _, test := range []struct {
		rate, step float64
		rows       int
		want       bool
	}{
		{2000, 1e-4, 40, true},     // steps of exactly 5 ten-thousandths
		{12800, 1e-6, 10000, true}, // to 1e-6 of itself
		{3217, 1e-3, 60, false},    // four digits, known to 1 in 100
		{4000, 1e-3, 20000, true},
	} {
		fit, err := timebase.From(stamps(test.rate, test.step, test.rows, math.Floor), 0)
		if err != nil || fit.Sure() != test.want {
			t.Errorf("%v: sure is %v (± %.2g), %v, want %v", test, fit.Sure(), fit.Uncertainty(), err, test.want)
		}
	}
}

// follow feeds stamps to a tracker and describes its events.
func follow(k *timebase.Tracker, stamps []float64) string {
	events := ""
	for i, t := range stamps {
		if e, at := k.Next(t); e != timebase.Follows {
			events += fmt.Sprintf("%s at row %d, %.4f s; ", map[timebase.Event]string{timebase.Gap: "gap", timebase.Back: "back"}[e], i, at)
		}
	}
	return events
}

func even(rate float64, rows int) []float64 {
	all := make([]float64, rows)
	for i := range all {
		all[i] = float64(i) / rate
	}
	return all
}

func TestTracker(t *testing.T) {
	const rate = 1000.0
	shift := func(s []float64, from int, by float64) []float64 {
		for i := from; i < len(s); i++ {
			s[i] += by
		}
		return s
	}
	drift := even(rate, 200_000)
	for i := range drift {
		drift[i] *= 1 + 20e-6
	}
	random := rand.New(rand.NewPCG(9, 10))
	coarse := even(rate, 50_000)
	for i := range coarse {
		coarse[i] = math.Floor(coarse[i]*10) / 10
	}
	noisy := even(rate, 50_000)
	for i := range noisy {
		noisy[i] += 2e-4 * (random.Float64() - 0.5)
	}
	for name, test := range map[string]struct {
		step, wraps float64
		stamps      []float64
		want        string
	}{
		"even":               {1e-6, 0, even(rate, 10_000), ""},
		"a slow clock":       {1e-6, 0, drift, ""},
		"tenths of seconds":  {0.1, 0, coarse, ""},
		"noisy":              {1e-6, 0, noisy, ""},
		"one row lost":       {1e-6, 0, shift(even(rate, 10_000), 5000, 1e-3), "gap at row 5000, 5.0010 s; "},
		"an hour lost":       {1e-6, 0, shift(even(rate, 10_000), 5000, 3600), "gap at row 5000, 3605.0000 s; "},
		"back":               {1e-6, 0, shift(even(rate, 10_000), 5000, -2), "back at row 5000, 5.0000 s; "},
		"back and forth":     {1e-6, 0, shift(shift(even(rate, 10_000), 5000, -2), 7000, 2), "back at row 5000, 5.0000 s; gap at row 7000, 9.0000 s; "},
		"midnight":           {1e-6, 86400, shift(even(rate, 10_000), 5000, -86400), ""},
		"midnight and a gap": {1e-6, 86400, shift(even(rate, 10_000), 5000, -86390), "gap at row 5000, 15.0000 s; "},
	} {
		k := timebase.NewTracker(timebase.Fit{}, rate, test.wraps)
		k.Allow(test.step)
		if got := follow(k, test.stamps); got != test.want {
			t.Errorf("%s: %s, want %s", name, got, test.want)
		}
	}
}

func TestTrackerPassesOverMissingStamps(t *testing.T) {
	s := even(1000, 100)
	s[0], s[50] = math.NaN(), math.NaN()
	k := timebase.NewTracker(timebase.Fit{}, 1000, 0)
	k.Allow(1e-6)
	if got := follow(k, s); got != "" {
		t.Errorf("missing stamps give %s", got)
	}
}
