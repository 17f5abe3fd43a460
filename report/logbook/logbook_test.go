package logbook

import (
	"database/sql"
	"errors"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"reflect"
	"strings"
	"sync"
	"testing"
	"time"

	"wavetally/report"
	"wavetally/report/trend"
)

var now = time.Date(2026, 12, 1, 8, 0, 0, 0, time.UTC)

func facts(site string, month int) *trend.Facts {
	return &trend.Facts{Site: site, Start: time.Date(2024, time.Month(1+month), 5, 0, 0, 0, 0, time.UTC), Duration: 7 * 86400, Zone: "UTC",
		Files: []string{fmt.Sprint("file of month ", month)}, Coverage: report.Coverage{Intervals: 1008, Valid: 1008},
		Channels: []trend.ChannelFacts{{Name: "V1", Quantity: "voltage", Unit: "V", RMS: 230}}}
}

func open(t testing.TB, path string) *Book {
	t.Helper()
	b, err := Open(path)
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { b.Close() })
	return b
}

func TestAddListRemove(t *testing.T) {
	b := open(t, filepath.Join(t.TempDir(), "a folder that is made", "book # 100 % ?.sqlite"))
	if n, err := b.Add(now, facts("b", 0), facts("a", 1), facts("a", 0)); n != 3 || err != nil {
		t.Fatal(n, err)
	}
	if n, err := b.Add(now, facts("a", 1)); n != 0 || err != nil {
		t.Errorf("the same survey again: %d added, %v", n, err)
	}
	list, err := b.List("")
	if err != nil || len(list) != 3 || list[0].Site != "a" || list[0].Start.Month() != 1 || list[2].Site != "b" || !list[0].Added.Equal(now) {
		t.Fatalf("list %+v, %v", list, err)
	}
	got, err := b.Facts("a")
	if err != nil || len(got) != 2 || !reflect.DeepEqual(got[1], facts("a", 1)) {
		t.Errorf("facts %+v, %v", got, err)
	}
	if err := b.Remove(list[0].ID, 99); !errors.Is(err, ErrNoEntry) {
		t.Errorf("removing an entry that is not there: %v", err)
	}
	if list, _ := b.List("a"); len(list) != 2 {
		t.Error("a removal that failed took an entry away")
	}
	if err := b.Remove(list[0].ID); err != nil {
		t.Error(err)
	}
	if sites, err := b.Sites(); err != nil || !reflect.DeepEqual(sites, []string{"a", "b"}) {
		t.Errorf("sites %v, %v", sites, err)
	}
	if n, err := b.Check(); n != 2 || err != nil {
		t.Errorf("check: %d, %v", n, err)
	}
}

// Another configuration of the same recording is another entry: it starts a new series.
func TestConfigurationIsPartOfTheSurvey(t *testing.T) {
	b := open(t, filepath.Join(t.TempDir(), "book"))
	other := facts("a", 0)
	other.Config.DemandA = 400
	if n, err := b.Add(now, facts("a", 0), other); n != 2 || err != nil {
		t.Error(n, err)
	}
}

func TestEvents(t *testing.T) {
	b := open(t, filepath.Join(t.TempDir(), "book"))
	later, first := trend.Event{Date: "2026-03-31", Text: "filter"}, trend.Event{Date: "2025-01-02", Text: "drive added"}
	for _, e := range []trend.Event{later, first, later} {
		if err := b.AddEvent("a", e); err != nil {
			t.Fatal(err)
		}
	}
	if got, err := b.Events("a"); err != nil || !reflect.DeepEqual(got, []trend.Event{first, later}) {
		t.Errorf("%v, %v", got, err)
	}
	if got, _ := b.Events("b"); len(got) != 0 {
		t.Error("another site has the events")
	}
	for date, want := range map[string]string{"31.3.2026": `"31.3.2026" is no date; write it as 2026-03-31`, "2026-02-30": `"2026-02-30" is no date; write it as 2026-03-31`} {
		if err := b.AddEvent("a", trend.Event{Date: date, Text: "x"}); err == nil || err.Error() != want {
			t.Errorf("%s: %v", date, err)
		}
	}
	if b.AddEvent("a", trend.Event{Date: "2026-03-31", Text: " "}) == nil {
		t.Error("an event without a text is taken")
	}
}

func TestMigrations(t *testing.T) {
	path := filepath.Join(t.TempDir(), "book")
	db, err := sql.Open("sqlite", path)
	if err != nil {
		t.Fatal(err)
	}
	// A book as version 1 left it, with one survey.
	packed, err := pack(facts("a", 0))
	if err != nil {
		t.Fatal(err)
	}
	for _, q := range []string{migrations[0], "PRAGMA user_version = 1"} {
		if _, err := db.Exec(q); err != nil {
			t.Fatal(err)
		}
	}
	if _, err := db.Exec("INSERT INTO survey (key, site, start, duration_s, config, added, facts) VALUES ('k','a','2024-01-05T00:00:00Z',1,'c','2024-02-01T00:00:00Z',?)", packed); err != nil {
		t.Fatal(err)
	}
	db.Close()
	b := open(t, path)
	if got, err := b.Facts("a"); err != nil || len(got) != 1 {
		t.Errorf("after migration: %v, %v", got, err)
	}
	if err := b.AddEvent("a", trend.Event{Date: "2024-01-01", Text: "x"}); err != nil {
		t.Error(err)
	}
	b.db.Exec("PRAGMA user_version = 99")
	if _, err := Open(path); err == nil || !strings.Contains(err.Error(), "made by a newer version of this program (logbook version 99, this program knows 2)") {
		t.Errorf("a newer book: %v", err)
	}
}

func TestFilesThatAreNoLogbook(t *testing.T) {
	dir := t.TempDir()
	text := filepath.Join(dir, "text")
	os.WriteFile(text, []byte(strings.Repeat("this is no database\n", 100)), 0o666)
	if _, err := Open(text); err == nil || err.Error() != text+": is not a logbook; name another file with --logbook" {
		t.Errorf("a text file: %v", err)
	}
	if _, err := Open(dir); err == nil || !strings.Contains(err.Error(), "is a folder") {
		t.Errorf("a folder: %v", err)
	}
	other := filepath.Join(dir, "other")
	db, _ := sql.Open("sqlite", other)
	db.Exec("CREATE TABLE x (y)")
	db.Close()
	if _, err := Open(other); err == nil || !strings.Contains(err.Error(), "database of another program") {
		t.Errorf("another program's database: %v", err)
	}
}

func TestDamageIsFound(t *testing.T) {
	path := filepath.Join(t.TempDir(), "book")
	b := open(t, path)
	if _, err := b.Add(now, facts("a", 0)); err != nil {
		t.Fatal(err)
	}
	if _, err := b.db.Exec("UPDATE survey SET facts = x'1f8b0800'"); err != nil {
		t.Fatal(err)
	}
	if _, err := b.Check(); err == nil || !strings.Contains(err.Error(), "entry 1 is damaged") {
		t.Errorf("check: %v", err)
	}
}

// A full disk loses nothing that was added before.
func TestFullDisk(t *testing.T) {
	b := open(t, filepath.Join(t.TempDir(), "book"))
	b.db.SetMaxOpenConns(1) // the limit below is one connection's
	if _, err := b.Add(now, facts("a", 0)); err != nil {
		t.Fatal(err)
	}
	var pages int
	b.db.QueryRow("PRAGMA page_count").Scan(&pages)
	b.db.Exec(fmt.Sprintf("PRAGMA max_page_count = %d", pages+2))
	var err error
	added := 1
	for m := 1; m < 500 && err == nil; m++ {
		if _, err = b.Add(now, facts("a", m)); err == nil {
			added++
		}
	}
	if err == nil || !strings.Contains(err.Error(), "the disk is full; make room and try again, nothing that was added before is lost") {
		t.Fatalf("a full disk: %v", err)
	}
	b.db.Exec("PRAGMA max_page_count = 1000000")
	if n, err := b.Check(); n != added || err != nil {
		t.Errorf("after a full disk %d of %d entries, %v", n, added, err)
	}
}

// Two writers wait for each other.
func TestTwoWriters(t *testing.T) {
	path := filepath.Join(t.TempDir(), "book")
	open(t, path)
	var wg sync.WaitGroup
	errs := make([]error, 4)
	for w := range errs {
		wg.Go(func() {
			b, err := Open(path)
			if err != nil {
				errs[w] = err
				return
			}
			defer b.Close()
			for m := range 10 {
				if _, err := b.Add(now, facts(fmt.Sprint("site ", w), m)); err != nil {
					errs[w] = err
				}
			}
		})
	}
	wg.Wait()
	if err := errors.Join(errs...); err != nil {
		t.Fatal(err)
	}
	if n, err := open(t, path).Check(); n != 40 || err != nil {
		t.Errorf("%d entries, %v; want 40", n, err)
	}
}

// A writer that is killed in the middle loses nothing that it had reported as added.
func TestKilledWriter(t *testing.T) {
	path := os.Getenv("LOGBOOK_TO_FILL")
	if path != "" { // the writer
		b, err := Open(path)
		if err != nil {
			fmt.Println(err)
			os.Exit(1)
		}
		for m := 0; ; m++ {
			if _, err := b.Add(now, facts("a", m)); err != nil {
				fmt.Println(err)
				os.Exit(1)
			}
			os.Stdout.WriteString("x")
		}
	}
	for round := range 3 {
		path := filepath.Join(t.TempDir(), "book")
		cmd := exec.Command(os.Args[0], "-test.run", "TestKilledWriter$")
		cmd.Env = append(os.Environ(), "LOGBOOK_TO_FILL="+path)
		out, err := cmd.StdoutPipe()
		if err != nil {
			t.Fatal(err)
		}
		if err := cmd.Start(); err != nil {
			t.Fatal(err)
		}
		buf := make([]byte, 64)
		reported := 0
		for reported < 5+3*round {
			n, err := out.Read(buf)
			if err != nil {
				t.Fatalf("the writer ended: %v", err)
			}
			reported += n
		}
		cmd.Process.Kill()
		for {
			n, err := out.Read(buf)
			reported += n
			if err != nil {
				break
			}
		}
		cmd.Wait()
		n, err := open(t, path).Check()
		if err != nil || n < reported || n > reported+1 {
			t.Errorf("killed after reporting %d surveys: the book holds %d, %v", reported, n, err)
		}
	}
}

// Ten years of monthly surveys of 20 sites, 8 channels of 50 orders: added in batches and trended.
func BenchmarkTenYearsOfTwentySites(b *testing.B) {
	var all []*trend.Facts
	for s := range 20 {
		for m := range 120 {
			f := facts(fmt.Sprint("site ", s), m)
			f.Channels = nil
			for c := range 8 {
				ch := trend.ChannelFacts{Name: fmt.Sprintf("%c%d", "VI"[c/4], c%4+1), Quantity: []string{"voltage", "current"}[c/4], Unit: "A"}
				for h := 1; h <= 50; h++ {
					v := report.Number(float64(1+(h*7+m*3+c)%17) / float64(h))
					ch.Rows = append(ch.Rows, trend.Row{Quantity: "harmonic", Order: h, Unit: "A", Limit: 20, Stats: &report.LevelStats{Interval: 600, N: 1008, P50: v, P95: v, P99: v, Max: v}})
				}
				f.Channels = append(f.Channels, ch)
			}
			all = append(all, f)
		}
	}
	for b.Loop() {
		book, err := Open(filepath.Join(b.TempDir(), "book"))
		if err != nil {
			b.Fatal(err)
		}
		start := time.Now()
		for i := 0; i < len(all); i += 100 {
			if _, err := book.Add(now, all[i:i+100]...); err != nil {
				b.Fatal(err)
			}
		}
		added := time.Now()
		sites, err := book.Sites()
		if err != nil || len(sites) != 20 {
			b.Fatal(sites, err)
		}
		for _, s := range sites {
			f, err := book.Facts(s)
			if err != nil {
				b.Fatal(err)
			}
			if _, err := trend.Build(f, nil, trend.Options{}); err != nil {
				b.Fatal(err)
			}
		}
		b.ReportMetric(added.Sub(start).Seconds(), "s-adding")
		b.ReportMetric(time.Since(added).Seconds(), "s-trending")
		book.Close()
	}
}
