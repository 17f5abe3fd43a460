package comtrade_test

import (
	"bytes"
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"golang.org/x/text/encoding"
	"golang.org/x/text/encoding/charmap"
	"golang.org/x/text/encoding/simplifiedchinese"
	"golang.org/x/text/encoding/unicode"

	"wavetally/harmonics/site"
	"wavetally/loaders/comtrade"
	"wavetally/loaders/input"
)

func write(t testing.TB, path string, data []byte) {
	t.Helper()
	if err := os.WriteFile(path, data, 0o666); err != nil {
		t.Fatal(err)
	}
}

func replaceOnce(t testing.TB, text []byte, old, replacement string) []byte {
	t.Helper()
	if bytes.Count(text, []byte(old)) != 1 {
		t.Fatalf("%q is not there once", old)
	}
	return bytes.Replace(text, []byte(old), []byte(replacement), 1)
}

// small is the text of a configuration of one channel and five records.
func small(station, channel string) string {
	return strings.Join([]string{station + ",board,1999", "1,1A,0D", "1," + channel + ",A,,V,1,0,0,-999,999,1,1,P", "50", "1", "1000,5",
		"01/03/2026,00:00:00.000000", "01/03/2026,00:00:00.000000", "ASCII", "1", ""}, "\r\n")
}

const fiveRecords = "1,0,1\r\n2,1000,2\r\n3,2000,3\r\n4,3000,4\r\n5,4000,5\r\n"

func TestEncodingsOfNames(t *testing.T) {
	for _, test := range []struct {
		name, station, channel string
		encoding               encoding.Encoding
		declared               string
	}{
		{"UTF-8", "Bäckerei 面包店", "Spannung L1", nil, ""},
		{"UTF-8 with mark", "\uFEFFBäckerei", "ток фазы А", nil, ""},
		{"UTF-16", "Bäckerei", "Напряжение", unicode.UTF16(unicode.LittleEndian, unicode.UseBOM), ""},
		{"CP866", "Хлебозавод, щит 1", "Напряжение фаза А", charmap.CodePage866, ""},
		{"CP866 in capitals", "ПОДСТАНЦИЯ СЕВЕРНАЯ", "НАПРЯЖЕНИЕ", charmap.CodePage866, ""},
		{"Windows-1251", "Хлебозавод, щит 1", "Напряжение фаза А", charmap.Windows1251, ""},
		{"GB18030", "面包厂 配电室", "母线电压 相电流", simplifiedchinese.GB18030, ""},
		{"ISO 8859-1, Portuguese", "Estação de Medição", "Oscilógrafo", charmap.ISO8859_1, ""},
		{"ISO 8859-1, German", "Bäckerei Übergabe", "Außenleiter", charmap.ISO8859_1, ""},
		{"ISO 8859-1, French", "Réseau électrique", "tension à l'entrée", charmap.ISO8859_1, ""},
		{"CP850", "Réseau électrique", "Phase été", charmap.CodePage850, ""},
		{"declared", "Żółw", "napięcie", charmap.ISO8859_2, "iso-8859-2"},
	} {
		t.Run(test.name, func(t *testing.T) {
			text := []byte(small(test.station, test.channel))
			if test.encoding != nil {
				var err error
				if text, err = test.encoding.NewEncoder().Bytes(text); err != nil {
					t.Fatal(err)
				}
			}
			dir := t.TempDir()
			write(t, filepath.Join(dir, "rec.cfg"), text)
			write(t, filepath.Join(dir, "rec.dat"), []byte(fiveRecords))
			src, err := comtrade.Open(filepath.Join(dir, "rec.cfg"), input.Options{File: site.File{Encoding: test.declared}})
			if err != nil {
				t.Fatal(err)
			}
			if got := src.Header().Channels[0].Name; got != test.channel {
				t.Errorf("channel %q, want %q", got, test.channel)
			}
			if got, want := src.Header().Files[0].Reading, strings.TrimPrefix(test.station, "\uFEFF"); !strings.Contains(got, want) {
				t.Errorf("read as %q, which has no %q in it", got, want)
			}
		})
	}
}

func TestNamesInAnyLetterCase(t *testing.T) {
	for _, names := range [][2]string{{"rec.cfg", "rec.dat"}, {"REC.CFG", "REC.DAT"}, {"Rec.cfg", "REC.Dat"}, {"rec.CFG", "rec.dat"}, {"a.b.cfg", "a.b.DAT"}} {
		dir := t.TempDir()
		write(t, filepath.Join(dir, names[0]), []byte(small("x", "V1")))
		write(t, filepath.Join(dir, names[1]), []byte(fiveRecords))
		write(t, filepath.Join(dir, "rec2.dat"), []byte("not this one"))
		for _, name := range names {
			src, err := comtrade.Open(filepath.Join(dir, name), input.Options{})
			if err != nil {
				t.Errorf("%s of %v: %v", name, names, err)
				continue
			}
			files := src.Header().Files
			if len(files) != 2 || files[0].Name != names[0] || files[1].Name != names[1] || files[1].Path != filepath.Join(dir, names[1]) {
				t.Errorf("%s of %v: files %v", name, names, files)
			}
		}
	}
	// Beside two that differ by letter case alone, the one of the same case is taken.
	dir := t.TempDir()
	write(t, filepath.Join(dir, "rec.cfg"), []byte(small("x", "V1")))
	write(t, filepath.Join(dir, "REC.dat"), []byte("not this one"))
	if _, err := os.Stat(filepath.Join(dir, "rec.dat")); err == nil {
		t.Skip("this disk does not tell letter case apart")
	}
	write(t, filepath.Join(dir, "rec.dat"), []byte(fiveRecords))
	if files := open(t, filepath.Join(dir, "rec.cfg")).Header().Files; files[1].Name != "rec.dat" {
		t.Errorf("%s is taken", files[1].Name)
	}
}

// Time codes of the 2013 edition, and the site's zone where there is none.
func TestZones(t *testing.T) {
	local := time.FixedZone("", 2*3600)
	for _, test := range []struct {
		edition, code string
		want          string
		known         bool
	}{
		{"2013", "-5h30", "2026-03-01T12:00:00-05:30", true},
		{"2013", "+1", "2026-03-01T12:00:00+01:00", true},
		{"2013", "0", "2026-03-01T12:00:00Z", true},
		{"2013", "-0h30", "2026-03-01T12:00:00-00:30", true},
		{"2013", "5.5", "2026-03-01T12:00:00+05:30", true},
		{"2013", "+5:45", "2026-03-01T12:00:00+05:45", true},
		{"2013", "x", "2026-03-01T12:00:00+02:00", false},
		{"2013", "", "2026-03-01T12:00:00+02:00", false},
		{"2013", "-", "2026-03-01T12:00:00+02:00", false},
		{"2013", "99", "2026-03-01T12:00:00+02:00", false},
		{"1999", "-5h30", "2026-03-01T12:00:00+02:00", false},
	} {
		dir := t.TempDir()
		text := strings.NewReplacer(",1999", ","+test.edition, "00:00:00", "12:00:00").Replace(small("x", "V1"))
		write(t, filepath.Join(dir, "rec.cfg"), fmt.Appendf(nil, "%s%s,%s\r\n0,0\r\n", text, test.code, test.code))
		write(t, filepath.Join(dir, "rec.dat"), []byte(fiveRecords))
		src, err := comtrade.Open(filepath.Join(dir, "rec.cfg"), input.Options{Zone: local})
		if err != nil {
			t.Fatal(err)
		}
		h := src.Header()
		if got := h.Start.Format(time.RFC3339); got != test.want || h.HasZone != test.known {
			t.Errorf("edition %s, time code %q: %s, known %t; want %s, %t", test.edition, test.code, got, h.HasZone, test.want, test.known)
		}
	}
}

// The site sheet's sampling rate wins over a single one in the file and over stamps, and is no help among several.
func TestDeclaredRate(t *testing.T) {
	for _, test := range []struct{ rates, code string }{{"1\r\n1000,5", "rate-overruled"}, {"0\r\n0,5", ""}, {"2\r\n1000,3\r\n500,5", "rate-ignored"}} {
		dir := t.TempDir()
		write(t, filepath.Join(dir, "rec.cfg"), replaceOnce(t, []byte(small("x", "V1")), "1\r\n1000,5", test.rates))
		write(t, filepath.Join(dir, "rec.dat"), []byte(fiveRecords))
		src, err := comtrade.Open(filepath.Join(dir, "rec.cfg"), input.Options{Rate: 6400})
		if err != nil {
			t.Fatal(err)
		}
		h := src.Header()
		want := 6400.0
		if test.code == "rate-ignored" {
			want = 1000
		}
		code := ""
		for _, n := range h.Notes {
			code += n.Code
		}
		if h.Rate != want || code != test.code {
			t.Errorf("rates %q: %g Hz, note %q; want %g Hz, %q", test.rates, h.Rate, code, want, test.code)
		}
	}
}
