// Package xlsx writes a survey as a workbook that a utility or an engineer can check and go on working with.
//
// Numbers are numbers, moments are dates in UTC, and what was not measured is an empty cell, never 0. The verdicts are
// live: sheets "Verdicts voltage" and "Verdicts current" compute value, limit, share and result by formulas from the
// inputs on sheet "Site" and the tables on sheet "Limits", by way of "Limits in force". Who changes the short-circuit
// current, the demand current, the nominal voltage, an uncertainty or a limit sees rows, limits and results follow. Every
// formula cell also holds the survey's own value, for programs that show a workbook without calculating it; only
// functions known to every spreadsheet program are used.
//
// The same survey gives the same bytes.
package xlsx
