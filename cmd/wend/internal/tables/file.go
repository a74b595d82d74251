package tables

import (
	"bufio"
	"fmt"
	"io"
	"os"
	"path/filepath"
)

// WriteFile makes dir/name with what write writes, whole or not at all: the bytes go to a file beside
// it, which takes the name only when all of them are on disk. An existing file is replaced.
func WriteFile(dir, name string, write func(w io.Writer) error) (err error) {
	f, err := os.CreateTemp(dir, "."+name+".*.part")
	if err != nil {
		return fmt.Errorf("tables: %s: %w", name, err)
	}
	defer func() {
		if err != nil {
			f.Close()
			os.Remove(f.Name())
			err = fmt.Errorf("tables: %s: %w", name, err)
		}
	}()
	w := bufio.NewWriterSize(f, 1<<16)
	if err = write(w); err != nil {
		return err
	}
	if err = w.Flush(); err != nil {
		return err
	}
	if err = f.Chmod(0o644); err != nil {
		return err
	}
	if err = f.Sync(); err != nil {
		return err
	}
	if err = f.Close(); err != nil {
		return err
	}
	return os.Rename(f.Name(), filepath.Join(dir, name))
}

// WriteRows writes a table of its own columns, already text, into dir; [Number] is how a number stands in it.
func WriteRows(dir, name string, columns []string, rows [][]string) error {
	return WriteFile(dir, name, func(w io.Writer) error {
		out := newRowWriter(w, columns)
		for _, row := range rows {
			out.write(row...)
		}
		return out.flush()
	})
}

// Number is a result with the digits that the tables keep; empty for one that is not known.
func Number(v float64) string { return digits(v, digitsResult) }
