package pdf

// A block is a piece of the document that is not divided over pages. Its height may be elastic, as a chart's is.
type block struct {
	gap                  float64 // above it, dropped at the top of a page
	least, natural, most float64 // height
	keep                 bool    // on the same page as the next block
	fresh                float64 // begins a page when the one before is filled to at least this share; 0: never
	head                 *block  // set again above this block when it begins a page: a table's header
	outline              string  // entry in the outline, "" for none
	draw                 func(y, h float64)
}

// fixedBlock is a block of fixed height.
func fixedBlock(gap, height float64, draw func(y, h float64)) block {
	return block{gap: gap, least: height, natural: height, most: height, draw: draw}
}

// A placed block stands on a page at y, h high.
type placed struct {
	block
	y, h float64
}

// hole is the share of a page that may stay empty before elastic blocks are squeezed to take in one more.
const hole = 0.12

// compose divides blocks over pages from top to bottom. A page takes blocks as long as they fit; where the next would
// leave a hole, it is taken in if elastic blocks can make room. Then they share what room there is. So a page is left
// part empty only where the next block is neither elastic nor divisible, or the document ends.
func compose(blocks []block, top, bottom float64) [][]placed {
	var pages [][]placed
	var page []block
	room := bottom - top
	least, natural := 0.0, 0.0
	flush := func(full bool) {
		if len(page) > 0 {
			pages = append(pages, settle(page, top, bottom, full))
		}
		page, least, natural = nil, 0, 0
	}
	for i := 0; i < len(blocks); {
		n := chain(blocks[i:])
		group := blocks[i : i+n]
		i += n
		addLeast, addNatural := heights(group, len(page) == 0)
		breaks := natural+addNatural > room && (room-natural < hole*room || least+addLeast > room)
		fresh := group[0].fresh > 0 && natural > group[0].fresh*room
		if len(page) > 0 && (breaks || fresh) {
			flush(true)
		}
		if len(page) == 0 && group[0].head != nil {
			group = append([]block{*group[0].head}, group...)
		}
		addLeast, addNatural = heights(group, len(page) == 0)
		least, natural = least+addLeast, natural+addNatural
		page = append(page, group...)
	}
	flush(false)
	return pages
}

// chain counts the blocks from the first that must stand on one page.
func chain(blocks []block) int {
	n := 1
	for n < len(blocks) && blocks[n-1].keep {
		n++
	}
	return n
}

// heights sums up a group, without the gap above it where it begins a page.
func heights(group []block, first bool) (least, natural float64) {
	for i, b := range group {
		if i > 0 || !first {
			least, natural = least+b.gap, natural+b.gap
		}
		least, natural = least+b.least, natural+b.natural
	}
	return least, natural
}

// settle gives the blocks of a page their places. A page that others follow is filled by letting elastic blocks grow;
// on the last page of a part they keep their natural height.
func settle(page []block, top, bottom float64, full bool) []placed {
	room := bottom - top
	least, natural, most := 0.0, 0.0, 0.0
	for i, b := range page {
		if i > 0 {
			room -= b.gap
		}
		least, natural, most = least+b.least, natural+b.natural, most+b.most
	}
	height := func(b block) float64 { return b.natural }
	switch {
	case room < natural && natural > least:
		f := max(0, (room-least)/(natural-least))
		height = func(b block) float64 { return b.least + f*(b.natural-b.least) }
	case full && most > natural:
		f := min(1, (room-natural)/(most-natural))
		height = func(b block) float64 { return b.natural + f*(b.most-b.natural) }
	}
	var out []placed
	y := top
	for i, b := range page {
		if i > 0 {
			y += b.gap
		}
		h := height(b)
		out = append(out, placed{b, y, h})
		y += h
	}
	return out
}
