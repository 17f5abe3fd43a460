// Package limits holds harmonic limits against what was measured.
//
// A rule set is one edition of one document, kept as a data file (folder data) that can be read and checked beside the
// printed document: each table has its clause, its source, and whether it is corroborated or from memory. A utility's
// own document can be written in the same form and is read by the same parser. [Load] returns a rule set, [Names] lists
// the built-in ones, [RuleSet.Tables] gives the numbers as plain tables, and [RuleSet.Judge] the findings.
//
// # Results
//
//   - within: the whole period was recorded, and Value with the channel's declared uncertainty (per cent of reading)
//     added is at or below Limit.
//   - exceeds: the whole period was recorded, and Value with that uncertainty taken off is above Limit.
//   - undecided: a value is there but cannot carry a verdict. The record is shorter than the rule's period (Indicative),
//     the limit lies within the declared uncertainty, noise makes more than half the limit, or a total lacks orders.
//   - not assessed: the rule cannot be applied: demand current, short-circuit current or nominal voltage are not
//     declared, the point is not one that the limits are made for, or the order or interval was not measured.
//
// A record shorter than the rule's period is never within, and never exceeds: a whole week may still turn out either
// way. Why then says whether the value is already above the limit.
//
// # Periods and percentiles
//
// Percentiles are nearest rank over valid intervals, phases apart ([harmonics.NearestRank]). Weeks are consecutive runs of seven
// days from the first 10 min interval, and the last seven days where the record is no whole number of weeks; the worst
// one governs. From 95 % valid intervals a verdict stands as it is, from 80 % with a warning, below that a week does
// not count. Days are treated alike; their 99th percentile of 3 s values is exact.
//
// # What a verdict rests on
//
// ValueLow and ValueHigh are Value less and plus the channel's declared uncertainty, and the verdict compares them with
// Limit. They equal Value where no uncertainty is declared; Why then warns where 5 % of reading, the error that
// IEC 61000-4-7 allows a class I instrument, would change the answer.
//
// The rule is a count over one period: of the 1008 values of a week 50 may lie above the limit. When the week was
// recorded, that count is known and sampling leaves nothing open; so the confidence bounds of the percentile take no
// part in the verdict. They tell something else, how firm it is: what another such week might show. They are given as
// SampleLow and SampleHigh, and Why says when the limit lies between them. They are distribution-free (order
// statistics) and take the values as independent, which neighbouring intervals are not, so they are the least that
// sampling leaves open. An indicative value is a sample, and there they do widen ValueLow and ValueHigh.
//
// # Rule files
//
// TOML; unknown keys are errors. A whole example:
//
//	name       = "kestrel-grid-2026"           # small letters, digits, dots, hyphens; no name of a built-in set
//	title      = "Kestrel Grid connection code 2026: harmonics"
//	document   = "Kestrel Grid connection code"
//	edition    = "2026"
//	scope      = "Customers at 11 kV"          # optional
//	applies_at = ["PCC"]                       # optional: "PCC", "internal"; elsewhere limits are for information
//	grouping   = "harmonic subgroup of IEC 61000-4-7"     # optional, shown
//	generation = ""                            # optional: what to mind where generation is declared
//	notes      = ["Filters need a study."]     # optional, shown
//
//	[[table]]                                  # a table by order
//	id       = "voltage"                       # unique in the file
//	title    = "Planning levels"
//	clause   = "4.1, Table 2"
//	quantity = "voltage"                       # voltage, current
//	basis    = "fundamental"                   # fundamental; nominal (voltage); demand current (current)
//	voltage  = ">1 kV to 36 kV"                # optional: nominal voltages, line to line, that it is for
//	rows_by  = "order"
//	limits   = [                               # per cent
//	  { orders = "5", limit = 5.0 },
//	  { orders = "17-49 odd non-triplen", formula = "1.9 (17/h) - 0.2" },
//	  { orders = "2-50 even", limit = 0.5, status = "from memory" },   # clause, status, source may differ by entry
//	  { orders = "thd 2-50", limit = 6.5 },
//	]
//	status   = "read from the document"        # or "corroborated by 2" (public sources), "common practice", "from memory"
//	source   = "PDF of 2026-03-01"
//
//	[[table]]                                  # a table with rows
//	id       = "current"
//	title    = "Current limits"
//	clause   = "4.2, Table 3"
//	quantity = "current"
//	basis    = "demand current"
//	rows_by  = "isc_il"                        # or "voltage": nominal voltage
//	columns  = ["2-10", "11-50", "tdd 2-50"]
//	rows     = [
//	  { isc_il = "<50",  limits = [4.0, 2.0, 5.0] },
//	  { isc_il = ">=50", limits = [8.0, 4.0, 8.0] },
//	]
//	status   = "read from the document"
//	source   = "PDF of 2026-03-01"
//
//	[[order_factor]]                           # optional: multiplies the table's limits of some orders
//	quantity = "current"
//	orders   = "2-50 even"
//	factor   = 0.25
//	clause   = "4.2, note 1"
//	status   = "read from the document"
//	source   = "PDF of 2026-03-01"
//
//	[[statistic]]                              # at least one for each quantity that has a table
//	quantity   = "voltage"
//	interval   = "10 min"                      # or "3 s", with percentile = 99 and period = "day" only
//	percentile = 95                            # 100 is the maximum
//	period     = "week"                        # or "day"
//	clause     = "4.3"
//	status     = "read from the document"
//	source     = "PDF of 2026-03-01"
//
//	[[statistic]]
//	quantity   = "current"
//	interval   = "3 s"
//	percentile = 99
//	period     = "day"
//	factor     = 1.5                           # optional: multiplies the limits
//	clause     = "4.3"
//	status     = "read from the document"
//	source     = "PDF of 2026-03-01"
//
// Ranges are written "<20", "20 to <50", "100 to 1000", ">1 kV to 69 kV", "up to 1 kV", ">1000" or ">=50": a bare number
// belongs to the range, one after < or > does not. An order that has no limit is not judged; an order has one limit a
// table. [[raising]] (orders, held_to, factor, clause, status, source) states by how much the other limits may be
// raised where some orders are held to a share of theirs; it is shown and never applied. A statistic may have
// factor_formula, a factor by order such as "1.3 + 0.7/45 (h - 5)", with total_factor, and information, a reason for
// which it is shown and not judged.
package limits
