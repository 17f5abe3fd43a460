package csv_test

import (
	"math"
	"math/cmplx"
	"os"
	"testing"

	"wavetally/harmonics/wave"
	"wavetally/loaders/csv"
	"wavetally/loaders/input"
)

// read returns all samples of a recording.
func read(t *testing.T, src wave.Source) [][]float64 {
	t.Helper()
	data := make([][]float64, len(src.Header().Channels))
	for b, err := range src.Blocks() {
		if err != nil {
			t.Fatal(err)
		}
		for c := range data {
			data[c] = append(data[c], b.Data[c]...)
		}
	}
	return data
}

// TestMotorCurrents reads a recording made by others: three currents of a 60 Hz motor at 1 kHz, without header or time
// column. Its README states an unbalance of 3.9 % from an independent least-squares fit.
func TestMotorCurrents(t *testing.T) {
	const path = "../../../shared/real/motor_3phase_csv/SC_HLT_004.csv"
	if _, err := os.Stat(path); err != nil {
		t.Skip("../shared/real/motor_3phase_csv is not here")
	}
	src, err := csv.Open(path, input.Options{Rate: 1000})
	if err != nil {
		t.Fatal(err)
	}
	data := read(t, src)
	if len(data) != 3 || len(data[0]) != 1000 {
		t.Fatalf("read %d channels of %d samples, want 3 of 1000", len(data), len(data[0]))
	}
	if got, want := data[2][999], 2.40618637325117; got != want {
		t.Errorf("last sample is %v, want %v", got, want)
	}
	// 950 samples are 57 whole cycles of 60 Hz.
	var phasor [3]complex128
	for c := range phasor {
		for n, x := range data[c][:950] {
			phasor[c] += complex(x, 0) * cmplx.Rect(1, -2*math.Pi*60*float64(n)/1000)
		}
	}
	turn := cmplx.Rect(1, 2*math.Pi/3)
	forward := cmplx.Abs(phasor[0] + turn*phasor[1] + turn*turn*phasor[2])
	backward := cmplx.Abs(phasor[0] + turn*turn*phasor[1] + turn*phasor[2])
	unbalance := 100 * min(forward, backward) / max(forward, backward)
	if math.Abs(unbalance-3.9) > 0.1 {
		t.Errorf("unbalance is %.2f %%, want 3.9 %%", unbalance)
	}
}

func TestMotorWithoutRate(t *testing.T) {
	const path = "../../../shared/real/motor_3phase_csv/SC_HLT_004.csv"
	if _, err := os.Stat(path); err != nil {
		t.Skip("../shared/real/motor_3phase_csv is not here")
	}
	_, err := csv.Open(path, input.Options{})
	const want = "SC_HLT_004.csv:1: no column tells the time and no line above states the sampling rate; state it with --sampling-rate, or sampling_rate under [file] in the site sheet"
	if err == nil || err.Error() != want {
		t.Errorf("error is %v, want %s", err, want)
	}
}
