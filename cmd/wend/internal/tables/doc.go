// Package tables answers: what did a stack give, in files that a script can read?
//
// [Write] puts a [job.Result] into a folder as CSV tables and a summary in JSON, and [Read] takes them
// back. [Codes] is the one list of every short code in those files, with a sentence for each.
//
// Numbers are in the unit that their column names. A number that was not or could not be measured is an
// empty field, one without upper limit is inf. Every file appears whole or not at all. The same result
// gives the same bytes: no date, host or duration stands in any file.
//
// Limits: pictures and the raw stack are not in the tables, so that what [Read] returns has no Picture.
package tables
