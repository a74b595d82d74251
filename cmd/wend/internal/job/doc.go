// Package job answers what one movie says: it takes a stack with its settings, traces it, analyses
// every filament, and returns one [Result] in memory. It writes no files. Whatever measures a movie
// goes through it: a user's stack through [Open] and [Movie.Measure], a synthetic one through
// [Measure] alone.
//
// Here a trace.Filament becomes the input of modes ([SeriesOf]); nowhere else.
package job
