package chart

import (
	"image/color"
	"math"
	"testing"

	"wavetally/harmonics/site"
)

// lightness is CIE L* of an ink, 0 to 100 (CIE 15: relative luminance, then the cube-root law; sRGB linearised after
// IEC 61966-2-1).
func lightness(c color.NRGBA) float64 {
	linear := func(v uint8) float64 {
		s := float64(v) / 255
		if s <= 0.04045 {
			return s / 12.92
		}
		return math.Pow((s+0.055)/1.055, 2.4)
	}
	y := 0.2126*linear(c.R) + 0.7152*linear(c.G) + 0.0722*linear(c.B)
	if y <= 216.0/24389 {
		return y * 24389 / 27
	}
	return 116*math.Cbrt(y) - 16
}

// The helper above is checked by values of a table: 50 % grey, sRGB 119, is L* 50.03 (CIE 15, from memory).
func TestLightness(t *testing.T) {
	for v, want := range map[uint8]float64{0: 0, 119: 50.03, 255: 100} {
		if got := lightness(gray(v)); math.Abs(got-want) > 0.02 {
			t.Errorf("lightness of grey %d is %.2f, want %.2f", v, got, want)
		}
	}
}

// A grey copy must show the same order of values: lightness falls from each ink to the next.
func TestRampsDarken(t *testing.T) {
	for name, r := range map[string]ramp{
		"with a mark": {low: 0, high: 150, mark: 100}, "up to its mark": {low: 0, high: 100, mark: 100}, "logarithmic": {low: 0.01, high: 10, mark: math.NaN(), log: true},
	} {
		last := 101.0
		for i := range shadesOfRamp {
			l := lightness(r.ink(i))
			if l >= last {
				t.Errorf("%s: ink %d has lightness %.1f, not under %.1f", name, i, l, last)
			}
			last = l
		}
	}
}

// What is at the limit and what is just beyond it never look the same.
func TestRampTellsBesideTheMark(t *testing.T) {
	r := ramp{low: 0, high: 130, mark: 100}
	at, past := r.index(100), r.index(math.Nextafter(100, 200))
	if at >= shadesOfRamp/2 || past < shadesOfRamp/2 {
		t.Errorf("100 has ink %d and the next number %d; the limit lies between %d and %d", at, past, shadesOfRamp/2-1, shadesOfRamp/2)
	}
	for _, v := range []float64{-5, 0, 50, 100, 115, 130, 1e9} {
		if i := r.index(v); i < 0 || i >= shadesOfRamp {
			t.Errorf("%g has ink %d", v, i)
		}
	}
}

// The phases' inks are of the Color Universal Design set of 2002 (Okabe and Ito): blue 0072B2, orange E69F00, green
// 009E73, and vermilion D55E00 for limits. No two conductors share a dash.
func TestPhasesAreToldApartTwice(t *testing.T) {
	want := map[site.Role]color.NRGBA{"V1": {0x00, 0x72, 0xb2, 0xff}, "I2": {0xe6, 0x9f, 0x00, 0xff}, "V31": {0x00, 0x9e, 0x73, 0xff}}
	for role, ink := range want {
		if lookOf(role).ink != ink {
			t.Errorf("%s is drawn in %v, want %v", role, lookOf(role).ink, ink)
		}
	}
	if Limit != (color.NRGBA{0xd5, 0x5e, 0x00, 0xff}) {
		t.Errorf("limits are drawn in %v", Limit)
	}
	for i, a := range phaseLooks {
		for j, b := range phaseLooks[:i] {
			if a.ink == b.ink || len(a.dashes) == len(b.dashes) && (len(a.dashes) == 0 || a.dashes[0] == b.dashes[0]) {
				t.Errorf("conductors %d and %d look alike", i, j)
			}
		}
	}
}

// The word for what exceeds is small text: it needs a contrast of 4.5 on the verdict's tint (WCAG 2.1, 1.4.3).
func TestAlarmCanBeRead(t *testing.T) {
	luminance := func(c color.NRGBA) float64 { return math.Pow((lightness(c)+16)/116, 3) }
	if ratio := (luminance(Tint) + 0.05) / (luminance(Alarm) + 0.05); ratio < 4.5 {
		t.Errorf("contrast %.2f", ratio)
	}
}
