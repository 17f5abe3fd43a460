package limits

import (
	"fmt"
	"strconv"
	"strings"

	"wavetally/harmonics"
)

// Orders is a set of harmonic orders that share a limit, or the range of a total.
type Orders struct {
	From, To int
	Parity   string // "odd", "even" or "" for both
	Triplen  string // "triplen" (multiples of 3), "non-triplen" or "" for both
	Total    string // "thd" or "tdd": the limit is for the total over From…To; else ""
	Text     string // as the rule file writes it, such as "18-49 odd non-triplen" or "thd 2-40"
}

// Contains reports whether the set holds order h. A total holds no order.
func (o Orders) Contains(h int) bool {
	return o.Total == "" && h >= o.From && h <= o.To &&
		(o.Parity == "" || (o.Parity == "even") == (h%2 == 0)) &&
		(o.Triplen == "" || (o.Triplen == "triplen") == (h%3 == 0))
}

const ordersHelp = `write it as "5", "2-10", "6-24 even", "18-49 odd non-triplen", "thd 2-40" or "tdd 2-50"`

// parseOrders reads a set of orders.
func parseOrders(text string) (Orders, error) {
	o := Orders{Text: text}
	bad := func(what string) (Orders, error) {
		return Orders{}, fmt.Errorf("%q: %s; %s", text, what, ordersHelp)
	}
	words := strings.Fields(text)
	if len(words) > 0 && (words[0] == "thd" || words[0] == "tdd") {
		o.Total, words = words[0], words[1:]
	}
	if len(words) == 0 {
		return bad("has no orders")
	}
	from, to, isRange := strings.Cut(words[0], "-")
	if !isRange {
		to = from
	}
	var err1, err2 error
	o.From, err1 = strconv.Atoi(from)
	o.To, err2 = strconv.Atoi(to)
	switch {
	case err1 != nil || err2 != nil:
		return bad("is no set of orders")
	case o.From < 2 || o.To > harmonics.MaxOrder:
		return bad(fmt.Sprintf("orders go from 2 to %d", harmonics.MaxOrder))
	case o.From > o.To:
		return bad("ends before it begins")
	case o.Total != "" && (len(words) > 1 || o.From != 2 || !isRange):
		return bad("a total runs from order 2 to its top order, all orders between")
	}
	for _, w := range words[1:] {
		switch {
		case (w == "odd" || w == "even") && o.Parity == "":
			o.Parity = w
		case (w == "triplen" || w == "non-triplen") && o.Triplen == "":
			o.Triplen = w
		default:
			return bad(fmt.Sprintf("what does %q mean", w))
		}
	}
	if o.Total == "" && !o.any() {
		return bad("holds no order")
	}
	return o, nil
}

func (o Orders) any() bool {
	for h := o.From; h <= o.To; h++ {
		if o.Contains(h) {
			return true
		}
	}
	return false
}

func (o Orders) String() string { return o.Text }
