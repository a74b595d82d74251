package tables

import (
	"os"
	"path/filepath"
	"reflect"

	"wend/cmd/wend/internal/job"
	"wend/imaging/ridge"
)

// Finished tells whether dir holds the results of exactly this movie: the same file by its hash, the
// same settings, version and ridge map. The error is the stack's, which could not be read.
func Finished(dir, name string, m *job.Movie) (bool, error) {
	f, err := os.Open(filepath.Join(dir, SummaryFile))
	if err != nil {
		return false, nil
	}
	defer f.Close()
	have, err := ReadSummary(f)
	if err != nil {
		return false, nil
	}
	hash, err := m.Hash()
	if err != nil {
		return false, err
	}
	want := Summarise(&job.Result{Name: name, SHA256: hash, Version: job.Version,
		RidgeImplementation: ridge.Implementation(), Settings: m.Settings})
	same := have.Name == want.Name && have.Input.SHA256 == want.Input.SHA256 && have.Version == want.Version &&
		have.Ridge == want.Ridge && reflect.DeepEqual(have.Settings, want.Settings)
	return same, nil
}
