package pdf

import (
	"math"
	"math/rand/v2"
	"strconv"
	"testing"
)

const pageTop, pageBottom = 50.0, 750.0

func stiff(h float64) block { return fixedBlock(10, h, nil) }

func elastic(least, natural, most float64) block {
	return block{gap: 10, least: least, natural: natural, most: most}
}

// numbered tells blocks apart by their outline, which compose does not look at.
func numbered(blocks []block) []block {
	for i := range blocks {
		blocks[i].outline = strconv.Itoa(i)
	}
	return blocks
}

// checkPages holds what every layout must: no block lost or out of order, none over another or outside its page,
// heights within bounds, chains unbroken.
func checkPages(t *testing.T, blocks []block, pages [][]placed) {
	t.Helper()
	n := 0
	for _, page := range pages {
		y := pageTop
		for k, p := range page {
			if p.y < y-1e-9 || p.y+p.h > pageBottom+1e-9 {
				t.Fatalf("block %s stands from %.1f to %.1f, room from %.1f", p.outline, p.y, p.y+p.h, y)
			}
			if p.h < p.least-1e-9 || p.h > p.most+1e-9 {
				t.Fatalf("block %s is %.1f high, bounds %.1f and %.1f", p.outline, p.h, p.least, p.most)
			}
			y = p.y + p.h
			if p.outline == "head" {
				continue
			}
			if p.outline != strconv.Itoa(n) {
				t.Fatalf("block %s stands where %d should", p.outline, n)
			}
			n++
			if k == len(page)-1 && p.keep && n < len(blocks) {
				t.Fatalf("block %s was parted from the next", p.outline)
			}
		}
	}
	if n != len(blocks) {
		t.Fatalf("%d blocks of %d were placed", n, len(blocks))
	}
}

func TestComposeKeepsItsPromises(t *testing.T) {
	rng := rand.New(rand.NewPCG(1, 2))
	for range 500 {
		var blocks []block
		for range 1 + rng.IntN(60) {
			h := 5 + 200*rng.Float64()
			b := stiff(h)
			if rng.IntN(3) == 0 {
				b = elastic(0.7*h, h, 1.3*h)
			}
			b.keep = rng.IntN(6) == 0 && (len(blocks) == 0 || !blocks[len(blocks)-1].keep)
			blocks = append(blocks, b)
		}
		checkPages(t, numbered(blocks), compose(blocks, pageTop, pageBottom))
	}
}

// A table's head is set again on every page that begins with one of its rows.
func TestHeadIsRepeated(t *testing.T) {
	head := stiff(20)
	head.outline = "head"
	var rows []block
	for range 100 {
		r := fixedBlock(0, 20, nil)
		r.head = &head
		rows = append(rows, r)
	}
	pages := compose(numbered(rows), pageTop, pageBottom)
	if len(pages) < 3 {
		t.Fatalf("%d pages", len(pages))
	}
	for i, page := range pages {
		if page[0].outline != "head" {
			t.Errorf("page %d begins with row %s", i+1, page[0].outline)
		}
	}
	checkPages(t, rows, pages)
}

// Where the next chart would leave a hole, charts give way; where it leaves little, it goes to the next page and they
// grow to fill theirs.
func TestElasticBlocksFillPages(t *testing.T) {
	squeezed := compose(numbered([]block{elastic(280, 400, 520), elastic(280, 400, 520)}), pageTop, pageBottom)
	if len(squeezed) != 1 {
		t.Errorf("two charts that fit when squeezed take %d pages", len(squeezed))
	}
	grown := compose(numbered([]block{elastic(300, 320, 420), elastic(300, 320, 420), elastic(300, 320, 420)}), pageTop, pageBottom)
	if len(grown) != 2 {
		t.Fatalf("three charts take %d pages", len(grown))
	}
	if last := grown[0][len(grown[0])-1]; math.Abs(last.y+last.h-pageBottom) > 1e-9 {
		t.Errorf("the first page ends at %.1f, not at %.1f", last.y+last.h, pageBottom)
	}
	if last := grown[1][0]; last.h != last.natural {
		t.Errorf("the last page's chart was stretched to %.1f", last.h)
	}
}

// A part that begins a page does so only when the one before is filled as far as it asks.
func TestFreshPages(t *testing.T) {
	for before, want := range map[float64]int{300: 1, 450: 2} {
		part := stiff(100)
		part.fresh = 0.6
		if got := len(compose(numbered([]block{stiff(before), part}), pageTop, pageBottom)); got != want {
			t.Errorf("after %.0f of 700: %d pages, want %d", before, got, want)
		}
	}
}
