// Package logbook keeps surveys in one SQLite file, for comparison from month to month. It keeps what comparison needs
// (package trend's Facts), not the documents.
//
// Every addition is a transaction that is on the disk before it is reported as done: a crash or a full disk at any moment
// loses nothing that was added before. A second writer waits for the first.
package logbook

import (
	"bytes"
	"database/sql"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"strings"
	"time"

	"github.com/klauspost/compress/gzip"
	_ "modernc.org/sqlite" // the driver "sqlite"

	"wavetally/report/trend"
)

// A Book is an open logbook. It may be used by several goroutines.
type Book struct {
	db   *sql.DB
	path string
}

// An Entry is one survey in the book.
type Entry struct {
	ID       int64
	Site     string
	Start    time.Time
	Duration float64 // s
	Config   string
	Added    time.Time
}

// migrations bring a book from one version to the next: migrations[v] takes version v to v+1. Never change one that was
// released; add another.
var migrations = []string{
	`CREATE TABLE survey (
		id INTEGER PRIMARY KEY,
		key TEXT NOT NULL UNIQUE,
		site TEXT NOT NULL,
		start TEXT NOT NULL,
		duration_s REAL NOT NULL,
		config TEXT NOT NULL,
		added TEXT NOT NULL,
		facts BLOB NOT NULL
	) STRICT;
	CREATE INDEX survey_site ON survey (site, start);`,
	`CREATE TABLE event (
		id INTEGER PRIMARY KEY,
		site TEXT NOT NULL,
		date TEXT NOT NULL,
		text TEXT NOT NULL,
		UNIQUE (site, date, text)
	) STRICT;`,
}

// waitForOthers is how long a writer waits for another, in ms.
const waitForOthers = 30_000

// Open opens the logbook at path, and makes it where there is none.
func Open(path string) (*Book, error) {
	if info, err := os.Stat(path); err == nil && info.IsDir() {
		return nil, fmt.Errorf("%s: is a folder; a logbook is a file", path)
	}
	if err := os.MkdirAll(filepath.Dir(path), 0o777); err != nil {
		return nil, fmt.Errorf("%s: its folder cannot be made: %w", path, err)
	}
	// FULL: a commit is on the disk when it returns. IMMEDIATE: a transaction waits for its turn when it begins, not
	// when it first writes, where waiting could not help any more.
	name := strings.NewReplacer("%", "%25", "?", "%3f", "#", "%23").Replace(filepath.ToSlash(path))
	db, err := sql.Open("sqlite", fmt.Sprintf("file:%s?_pragma=busy_timeout(%d)&_pragma=journal_mode(DELETE)&_pragma=synchronous(FULL)&_txlock=immediate", name, waitForOthers))
	if err != nil {
		return nil, fmt.Errorf("%s: %w", path, err)
	}
	b := &Book{db: db, path: path}
	if err := b.migrate(); err != nil {
		db.Close()
		return nil, err
	}
	return b, nil
}

// Close closes the book.
func (b *Book) Close() error { return b.db.Close() }

// Path is where the book lies.
func (b *Book) Path() string { return b.path }

// said puts the book's name before an error, and plain words for the commonest.
func (b *Book) said(err error) error {
	switch text := err.Error(); {
	case strings.Contains(text, "not a database"):
		return fmt.Errorf("%s: is not a logbook; name another file with --logbook", b.path)
	case strings.Contains(text, "disk is full") || strings.Contains(text, "SQLITE_FULL"):
		return fmt.Errorf("%s: the disk is full; make room and try again, nothing that was added before is lost", b.path)
	case strings.Contains(text, "database is locked") || strings.Contains(text, "SQLITE_BUSY"):
		return fmt.Errorf("%s: another program has been writing for %d s; try again when it has finished", b.path, waitForOthers/1000)
	case strings.Contains(text, "malformed"):
		return fmt.Errorf("%s: is damaged; run `wavetally logbook check`, and go back to a copy", b.path)
	case strings.Contains(text, "readonly") || strings.Contains(text, "unable to open"):
		return fmt.Errorf("%s: cannot be written; check its permissions and those of its folder", b.path)
	}
	return fmt.Errorf("%s: %w", b.path, err)
}

func (b *Book) migrate() error {
	tx, err := b.db.Begin()
	if err != nil {
		return b.said(err)
	}
	defer tx.Rollback()
	var version, tables int
	if err := tx.QueryRow("PRAGMA user_version").Scan(&version); err != nil {
		return b.said(err)
	}
	if version > len(migrations) {
		return fmt.Errorf("%s: was made by a newer version of this program (logbook version %d, this program knows %d); use that one", b.path, version, len(migrations))
	}
	if version == len(migrations) {
		return nil
	}
	if err := tx.QueryRow("SELECT count(*) FROM sqlite_master").Scan(&tables); err != nil {
		return b.said(err)
	}
	if version == 0 && tables > 0 {
		return fmt.Errorf("%s: is a database of another program; name another file with --logbook", b.path)
	}
	for _, step := range migrations[version:] {
		if _, err := tx.Exec(step); err != nil {
			return b.said(err)
		}
	}
	if _, err := tx.Exec(fmt.Sprintf("PRAGMA user_version = %d", len(migrations))); err != nil {
		return b.said(err)
	}
	if err := tx.Commit(); err != nil {
		return b.said(err)
	}
	return nil
}

// Add adds surveys, all of them or none, and returns how many were new. A survey that is in the book already is left as
// it is.
func (b *Book) Add(now time.Time, facts ...*trend.Facts) (added int, err error) {
	tx, err := b.db.Begin()
	if err != nil {
		return 0, b.said(err)
	}
	defer tx.Rollback()
	insert, err := tx.Prepare("INSERT INTO survey (key, site, start, duration_s, config, added, facts) VALUES (?, ?, ?, ?, ?, ?, ?) ON CONFLICT (key) DO NOTHING")
	if err != nil {
		return 0, b.said(err)
	}
	defer insert.Close()
	for _, f := range facts {
		packed, err := pack(f)
		if err != nil {
			return 0, err
		}
		res, err := insert.Exec(f.Key(), f.Site, f.Start.UTC().Format(time.RFC3339), f.Duration, f.Config.ID(), now.UTC().Format(time.RFC3339), packed)
		if err != nil {
			return 0, b.said(err)
		}
		n, err := res.RowsAffected()
		if err != nil {
			return 0, b.said(err)
		}
		added += int(n)
	}
	if err := tx.Commit(); err != nil {
		return 0, b.said(err)
	}
	return added, nil
}

func pack(f *trend.Facts) ([]byte, error) {
	var out bytes.Buffer
	z, err := gzip.NewWriterLevel(&out, gzip.BestSpeed)
	if err != nil {
		return nil, err
	}
	if err := json.NewEncoder(z).Encode(f); err != nil {
		return nil, err
	}
	if err := z.Close(); err != nil {
		return nil, err
	}
	return out.Bytes(), nil
}

// maxFacts bounds what an entry may unpack to, should the book be damaged.
const maxFacts = 64 << 20

func unpack(packed []byte) (*trend.Facts, error) {
	z, err := gzip.NewReader(bytes.NewReader(packed))
	if err != nil {
		return nil, err
	}
	f := &trend.Facts{}
	return f, json.NewDecoder(io.LimitReader(z, maxFacts)).Decode(f)
}

// List returns the entries of a site, of all sites for "", in the order of sites and time.
func (b *Book) List(site string) ([]Entry, error) {
	rows, err := b.db.Query("SELECT id, site, start, duration_s, config, added FROM survey WHERE ? IN ('', site) ORDER BY site, start, id", site)
	if err != nil {
		return nil, b.said(err)
	}
	defer rows.Close()
	var out []Entry
	for rows.Next() {
		var e Entry
		var start, added string
		if err := rows.Scan(&e.ID, &e.Site, &start, &e.Duration, &e.Config, &added); err != nil {
			return nil, b.said(err)
		}
		if e.Start, err = time.Parse(time.RFC3339, start); err != nil {
			return nil, b.said(err)
		}
		if e.Added, err = time.Parse(time.RFC3339, added); err != nil {
			return nil, b.said(err)
		}
		out = append(out, e)
	}
	if err := rows.Err(); err != nil {
		return nil, b.said(err)
	}
	return out, nil
}

// Sites returns the names of the sites that have surveys.
func (b *Book) Sites() ([]string, error) {
	return b.texts("SELECT DISTINCT site FROM survey ORDER BY site")
}

func (b *Book) texts(query string, args ...any) ([]string, error) {
	rows, err := b.db.Query(query, args...)
	if err != nil {
		return nil, b.said(err)
	}
	defer rows.Close()
	var out []string
	for rows.Next() {
		var s string
		if err := rows.Scan(&s); err != nil {
			return nil, b.said(err)
		}
		out = append(out, s)
	}
	if err := rows.Err(); err != nil {
		return nil, b.said(err)
	}
	return out, nil
}

// Facts returns a site's surveys in the order of time.
func (b *Book) Facts(site string) ([]*trend.Facts, error) {
	rows, err := b.db.Query("SELECT id, facts FROM survey WHERE site = ? ORDER BY start, id", site)
	if err != nil {
		return nil, b.said(err)
	}
	defer rows.Close()
	var out []*trend.Facts
	for rows.Next() {
		var id int64
		var packed []byte
		if err := rows.Scan(&id, &packed); err != nil {
			return nil, b.said(err)
		}
		f, err := unpack(packed)
		if err != nil {
			return nil, fmt.Errorf("%s: entry %d is damaged; run `wavetally logbook check`, and go back to a copy: %w", b.path, id, err)
		}
		out = append(out, f)
	}
	if err := rows.Err(); err != nil {
		return nil, b.said(err)
	}
	return out, nil
}

// ErrNoEntry says that there is no entry of that number.
var ErrNoEntry = errors.New("there is no such entry; see `wavetally logbook list`")

// Remove removes entries by number, all of them or none.
func (b *Book) Remove(ids ...int64) error {
	tx, err := b.db.Begin()
	if err != nil {
		return b.said(err)
	}
	defer tx.Rollback()
	for _, id := range ids {
		res, err := tx.Exec("DELETE FROM survey WHERE id = ?", id)
		if err != nil {
			return b.said(err)
		}
		if n, err := res.RowsAffected(); err != nil || n == 0 {
			return fmt.Errorf("%s: entry %d: %w", b.path, id, ErrNoEntry)
		}
	}
	if err := tx.Commit(); err != nil {
		return b.said(err)
	}
	return nil
}

// AddEvent notes something that may have changed a site's harmonics. The same event twice is one.
func (b *Book) AddEvent(site string, e trend.Event) error {
	if _, err := time.Parse("2006-01-02", e.Date); err != nil {
		return fmt.Errorf("%q is no date; write it as 2026-03-31", e.Date)
	}
	if strings.TrimSpace(e.Text) == "" {
		return errors.New("an event needs a text, such as \"filter put into service\"")
	}
	if _, err := b.db.Exec("INSERT INTO event (site, date, text) VALUES (?, ?, ?) ON CONFLICT DO NOTHING", site, e.Date, e.Text); err != nil {
		return b.said(err)
	}
	return nil
}

// Events returns a site's events in the order of time.
func (b *Book) Events(site string) ([]trend.Event, error) {
	rows, err := b.db.Query("SELECT date, text FROM event WHERE site = ? ORDER BY date, id", site)
	if err != nil {
		return nil, b.said(err)
	}
	defer rows.Close()
	var out []trend.Event
	for rows.Next() {
		var e trend.Event
		if err := rows.Scan(&e.Date, &e.Text); err != nil {
			return nil, b.said(err)
		}
		out = append(out, e)
	}
	if err := rows.Err(); err != nil {
		return nil, b.said(err)
	}
	return out, nil
}

// Check reads the whole book and returns how many entries are sound, or what is wrong.
func (b *Book) Check() (entries int, err error) {
	faults, err := b.texts("PRAGMA integrity_check")
	if err != nil {
		return 0, err
	}
	if len(faults) != 1 || faults[0] != "ok" {
		return 0, fmt.Errorf("%s: is damaged (%s); go back to a copy", b.path, strings.Join(faults, "; "))
	}
	sites, err := b.Sites()
	if err != nil {
		return 0, err
	}
	for _, s := range sites {
		facts, err := b.Facts(s)
		if err != nil {
			return entries, err
		}
		entries += len(facts)
	}
	return entries, nil
}
