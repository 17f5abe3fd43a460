package comtrade_test

import (
	"math"
	"os"
	"path/filepath"
	"testing"
	"time"

	"gonum.org/v1/gonum/mat"
)

// real returns the path of a recording made by others, which is not part of the project.
func real(t *testing.T, name string) string {
	t.Helper()
	path := filepath.FromSlash("../../../shared/real/" + name)
	if _, err := os.Stat(path); err != nil {
		t.Skipf("%s is missing: the recording made by others is not there", path)
	}
	return path
}

// Numbers from an independent least-squares fit of the first second (shared/real/README.md): 50.0045 Hz, 5.0098 A, THD
// 0.096 % over orders 2 to 8.
func TestRealRelayTest(t *testing.T) {
	src := open(t, real(t, "relaytest_1991_ascii/test.cfg"))
	h := src.Header()
	if h.Files[0].Format != "COMTRADE 1991 ASCII" || h.Rate != 1000 || h.Samples != 6000 || h.Nominal != 50 || len(h.Channels) != 4 ||
		!h.Start.Equal(time.Date(2007, 1, 1, 0, 45, 13, 457e6, time.UTC)) || h.HasZone {
		t.Errorf("header %+v", h)
	}
	for i, name := range []string{"Ia", "Iв", "Ic", "3Io"} {
		if h.Channels[i].Name != name || h.Channels[i].Unit != "A" {
			t.Errorf("channel %d is %+v, want %s", i, h.Channels[i], name)
		}
	}
	all := pieces(t, src)
	if len(all) != 1 || len(all[0].data[0]) != 6000 || len(h.Notes)+len(src.Notes()) > 0 {
		t.Errorf("%d segments; notes %v %v", len(all), h.Notes, src.Notes())
	}
	hz, amps := fit(all[0].data[0][:1000], 1000, 50, 8)
	if thd := distortion(amps); math.Abs(hz-50.0045) > 0.00005 || math.Abs(amps[1]-5.0098) > 0.00005 || math.Abs(thd-0.096) > 0.0005 {
		t.Errorf("%.5f Hz, %.5f A, THD %.4f %%; want 50.0045 Hz, 5.0098 A, 0.096 %%", hz, amps[1], thd)
	}
}

// fit is a least-squares fit of a constant and harmonics up to an order, at the frequency near start that leaves the
// least rest. It returns the rms of each order.
func fit(x []float64, rate, start float64, orders int) (hz float64, rms []float64) {
	low, high := start-0.5, start+0.5
	for range 30 {
		a, b := low+(high-low)/3, high-(high-low)/3
		if _, ra := fitAt(x, rate, a, orders); ra < second(fitAt(x, rate, b, orders)) {
			high = b
		} else {
			low = a
		}
	}
	hz = (low + high) / 2
	rms, _ = fitAt(x, rate, hz, orders)
	return hz, rms
}

func second(_ []float64, rest float64) float64 { return rest }

func fitAt(x []float64, rate, hz float64, orders int) (rms []float64, rest float64) {
	m := mat.NewDense(len(x), 2*orders+1, nil)
	for i := range x {
		m.Set(i, 0, 1)
		for h := 1; h <= orders; h++ {
			s, c := math.Sincos(2 * math.Pi * hz * float64(h) * float64(i) / rate)
			m.Set(i, 2*h-1, c)
			m.Set(i, 2*h, s)
		}
	}
	v := mat.NewVecDense(len(x), x)
	var w, r mat.VecDense
	if err := w.SolveVec(m, v); err != nil {
		panic(err)
	}
	r.MulVec(m, &w)
	r.SubVec(v, &r)
	rms = []float64{w.AtVec(0)}
	for h := 1; h <= orders; h++ {
		rms = append(rms, math.Hypot(w.AtVec(2*h-1), w.AtVec(2*h))/math.Sqrt2)
	}
	return rms, mat.Norm(&r, 2)
}

// distortion is the THD in per cent of the fundamental.
func distortion(rms []float64) float64 {
	sum := 0.0
	for _, v := range rms[2:] {
		sum += v * v
	}
	return 100 * math.Sqrt(sum) / rms[1]
}

// Numbers from an independent least-squares fit (shared/real/README.md): phase-A voltage 60.18 V secondary, THD 0.225 %;
// line current THD 3.9 %, h5 2.65 %. Which line current is not told: one of them must have it.
func TestRealSubstation(t *testing.T) {
	src := open(t, real(t, "substation_binary_multirate/xtz.cfg"))
	h := src.Header()
	if h.Files[0].Format != "COMTRADE 1999 BINARY" || h.Rate != 3200 || h.Samples != 3077 || len(h.Channels) != 48 {
		t.Errorf("header %+v", h.Files)
	}
	if name := h.Channels[0].Name; name != "220kV母线I_Ua" {
		t.Errorf("first channel is %q", name)
	}
	all := pieces(t, src)
	var lengths []int
	for _, p := range all {
		lengths = append(lengths, len(p.data[0]))
	}
	if len(all) != 4 || lengths[0] != 1280 || lengths[1] != 36 || lengths[2] != 1472 || lengths[3] != 289 || all[1].rate != 50 || all[2].rate != 3200 {
		t.Fatalf("segments of %v records", lengths)
	}
	const ratio = 127017 / 57.735
	const before = 576 // records, nine periods, before the fault that started the recording
	hz, volts := fit(all[0].data[0][:before], 3200, 50, 25)
	if v, thd := volts[1]/ratio, distortion(volts); math.Abs(v-60.18) > 0.005 || math.Abs(thd-0.225) > 0.001 {
		t.Errorf("phase A: %.4f V secondary, THD %.4f %%; want 60.18 V, 0.225 %%", v, thd)
	}
	found := ""
	for c, ch := range h.Channels {
		if ch.Unit != "A" {
			continue
		}
		amps, _ := fitAt(all[0].data[c][:before], 3200, hz, 25)
		thd, h5 := distortion(amps), 100*amps[5]/amps[1]
		if math.Abs(thd-3.9) < 0.05 && math.Abs(h5-2.65) < 0.005 {
			found = ch.Name
		}
	}
	if found == "" {
		t.Error("no current has THD 3.9 %, h5 2.65 %")
	}
}

// The rates of that recording are told by its time stamps too: a step of 312.5 µs is 3200 Hz, one of 19 993.6 µs 50.016 Hz.
func TestRealStampsTellTheRates(t *testing.T) {
	cfg := real(t, "substation_binary_multirate/xtz.cfg")
	text, err := os.ReadFile(cfg)
	if err != nil {
		t.Fatal(err)
	}
	data, err := os.ReadFile(cfg[:len(cfg)-3] + "dat")
	if err != nil {
		t.Fatal(err)
	}
	dir := t.TempDir()
	write(t, filepath.Join(dir, "rec.dat"), data)
	write(t, filepath.Join(dir, "rec.cfg"), replaceOnce(t, text, "4\n3200,1280\n50,1316\n3200,2788\n50,3077\n", "0\n0,3077\n"))
	all := pieces(t, open(t, filepath.Join(dir, "rec.cfg")))
	want := []struct {
		n        int
		at, rate float64
	}{{1281, 0, 3200}, {36, 0.419809, 50.016}, {1472, 1.119578, 3200}, {288, 1.59, 50.016}}
	if len(all) != len(want) {
		t.Fatalf("%d segments", len(all))
	}
	for i, w := range want {
		if n := len(all[i].data[0]); math.Abs(float64(n-w.n)) > 1 || math.Abs(all[i].rate-w.rate) > 2e-3*w.rate {
			t.Errorf("segment %d: %d records at %.6g Hz from %.6f s on; want %d at %.6g Hz", i, n, all[i].rate, all[i].at, w.n, w.rate)
		}
	}
}

// Small files of every kind, for decoding only. The expected samples are worked out by hand from the raw values in them.
func TestRealStructural(t *testing.T) {
	nan := math.NaN()
	ascii := func(raw float64) float64 { return (0.1138916015625*raw + 0.05694580078125) * 933 }
	for _, test := range []struct {
		file    string
		start   time.Time
		format  string
		rate    float64
		n       int
		channel string
		at, c   int
		want    []float64
	}{
		{"sample_ascii.cfg", brasilia("2011-01-12T05:55:30.075011-05:30"), "COMTRADE 2013 ASCII", 1200, 40, "3I0", 0, 0, []float64{ascii(-83), ascii(-15), ascii(55)}},
		{"sample_ascii.cff", brasilia("2011-01-12T05:55:30.075011-05:30"), "COMTRADE 2013 ASCII", 1200, 40, "3I0", 39, 1, nil},
		{"sample_bin.cfg", time.Date(2017, 1, 7, 15, 35, 41, 958268e3, time.UTC), "COMTRADE 1999 BINARY", 15360, 5, "VN", 0, 0, []float64{-0.000361849e3 * 24979}},
		{"sample_iso8859-1.cfg", brasilia("2011-01-12T05:55:30.075011-05:30"), "COMTRADE 2013 ASCII", 1200, 40, "3I0", 0, 3, []float64{ascii(-8), ascii(-6), ascii(2), ascii(24)}},
		{"sample_iso8859-1_bin.cfg", brasilia("2011-01-12T05:55:30.75011-05:30"), "COMTRADE 2013 BINARY", 1200, 40, "3I0", 0, 0, []float64{(0.000832454560204436*-15665 + 3.64453125) * 933}},
		{"sample_float32.cff", brasilia("2021-02-17T17:37:12.422969065Z"), "COMTRADE 2013 FLOAT32", 100, 301, "test/out1", 0, 0, []float64{float64(math.Float32frombits(0x4033d203))}},
		{"sample_ascii_missing.dat", brasilia("2011-01-12T05:55:30.075011-05:30"), "COMTRADE 2013 ASCII", 1200, 40, "3I0", 1, 0, []float64{nan, ascii(55)}},
		{"sample_bin_missing.dat", time.Date(2017, 1, 7, 15, 35, 41, 958268e3, time.UTC), "COMTRADE 1999 BINARY", 15360, 5, "VN", 0, 0, []float64{nan}},
		{"sample_ascii_utf-8.cfg", brasilia("2011-01-12T05:55:30.075011-05:30"), "COMTRADE 2013 ASCII", 1200, 40, "3I0", 0, 0, []float64{ascii(-83)}},
		{"sample_sub_char.cfg", brasilia("2011-01-12T05:55:30.075011-05:30"), "COMTRADE 2013 ASCII", 1200, 40, "3I0", 0, 0, []float64{ascii(-83)}},
	} {
		t.Run(test.file, func(t *testing.T) {
			src := open(t, pair(t, test.file))
			h := src.Header()
			if !h.Start.Equal(test.start) || h.Files[0].Format != test.format || h.Rate != test.rate || h.Channels[len(h.Channels)-1].Name != test.channel {
				t.Errorf("header %+v", h)
			}
			all := pieces(t, src)
			if len(all) != 1 || len(all[0].data[0]) != test.n {
				t.Fatalf("%d segments, the first of %d samples", len(all), len(all[0].data[0]))
			}
			for i, w := range test.want {
				if x := all[0].data[test.c][test.at+i]; math.IsNaN(x) != math.IsNaN(w) || math.Abs(x-w) > 1e-9*math.Abs(w) {
					t.Errorf("sample %d is %.12g, want %.12g", test.at+i, x, w)
				}
			}
		})
	}
}

func brasilia(s string) time.Time {
	t, err := time.Parse(time.RFC3339Nano, s)
	if err != nil {
		panic(err)
	}
	return t
}

// pair brings together a configuration and data that lie under different names.
func pair(t *testing.T, name string) string {
	t.Helper()
	path := real(t, "comtrade_structural/"+name)
	other := map[string][2]string{
		"sample_ascii_missing.dat": {"sample_ascii.cfg", "sample_ascii_missing.dat"},
		"sample_bin_missing.dat":   {"sample_bin.cfg", "sample_bin_missing.dat"},
		"sample_ascii_utf-8.cfg":   {"sample_ascii_utf-8.cfg", "sample_ascii.dat"},
		"sample_sub_char.cfg":      {"sample_sub_char.cfg", "sample_ascii.dat"},
	}[name]
	if other[0] == "" {
		return path
	}
	dir := t.TempDir()
	for i, ext := range []string{"cfg", "dat"} {
		data, err := os.ReadFile(real(t, "comtrade_structural/"+other[i]))
		if err != nil {
			t.Fatal(err)
		}
		write(t, filepath.Join(dir, "rec."+ext), data)
	}
	return filepath.Join(dir, "rec.cfg")
}
