// Package report answers: what did this stack give, on a page that can be read, printed and cited?
//
// [Write] puts report.html, one self-contained file, and traced.png into a folder; [Table] prints the
// short table for the end of a run on a terminal.
//
// The page has no script and loads nothing. Values are rounded to two significant digits of their
// uncertainty; the tables of package tables hold all digits. The same result gives the same bytes.
//
// Limits: figures show at most a few hundred points, evenly chosen; what was left out is said beside them.
package report
