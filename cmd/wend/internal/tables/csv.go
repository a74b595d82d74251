package tables

import (
	"encoding/csv"
	"errors"
	"fmt"
	"io"
	"math"
	"strconv"
	"strings"
)

// ErrColumn is wrapped by the error for a column that a table should have and has not.
var ErrColumn = errors.New("no such column")

// Table is a CSV table with a header, fields as text. Every row has as many fields as Columns.
type Table struct {
	// Name stands in errors, mostly the file's name.
	Name    string
	Columns []string
	Rows    [][]string
	// Lines is the line in the file on which each row starts, from 1.
	Lines []int

	index map[string]int
}

// ReadTable reads a CSV table. A byte-order mark is dropped. An empty file, a column without or with
// the same name as another one, and a row longer or shorter than the header are errors; no Table then.
func ReadTable(r io.Reader, name string) (*Table, error) {
	var all *Table
	header := func(t *Table) error {
		all = &Table{Name: t.Name, Columns: t.Columns, index: t.index}
		return nil
	}
	err := scan(r, name, header, func(t *Table) error {
		all.Rows = append(all.Rows, t.Rows[0])
		all.Lines = append(all.Lines, t.Lines[0])
		return nil
	})
	if err != nil {
		return nil, err
	}
	return all, nil
}

// scan reads a table row by row, so that a long one never stands in memory as a whole: header sees t
// without rows, row sees it with the one that was just read. It stops at their first error.
func scan(r io.Reader, name string, header, row func(t *Table) error) error {
	c := csv.NewReader(r)
	c.FieldsPerRecord = -1
	columns, err := c.Read()
	if err == io.EOF {
		return fmt.Errorf("tables: %s: empty, want a header line", name)
	}
	if err != nil {
		return fmt.Errorf("tables: %s: %w", name, err)
	}
	columns[0] = strings.TrimPrefix(columns[0], "\ufeff")
	t := &Table{Name: name, Columns: columns, index: make(map[string]int, len(columns))}
	for i, column := range columns {
		if column == "" {
			return fmt.Errorf("tables: %s line 1: column %d has no name", name, i+1)
		}
		if _, twice := t.index[column]; twice {
			return fmt.Errorf("tables: %s line 1: column %q stands there twice", name, column)
		}
		t.index[column] = i
	}
	if err := header(t); err != nil {
		return err
	}
	t.Rows, t.Lines = make([][]string, 1), make([]int, 1)
	for {
		fields, err := c.Read()
		if err == io.EOF {
			return nil
		}
		if err != nil {
			return fmt.Errorf("tables: %s: %w", name, err)
		}
		line, _ := c.FieldPos(0)
		if len(fields) != len(columns) {
			return fmt.Errorf("tables: %s line %d: %d fields, want %d", name, line, len(fields), len(columns))
		}
		t.Rows[0], t.Lines[0] = fields, line
		if err := row(t); err != nil {
			return err
		}
	}
}

// Write writes t so that [ReadTable] gives it back.
func (t *Table) Write(w io.Writer) error {
	out := newRowWriter(w, t.Columns)
	for _, row := range t.Rows {
		out.write(row...)
	}
	return out.flush()
}

// Need returns an error that wraps [ErrColumn] for the first of columns that t has not.
func (t *Table) Need(columns ...string) error {
	for _, column := range columns {
		if _, ok := t.index[column]; !ok {
			return fmt.Errorf("tables: %s: column %q: %w", t.Name, column, ErrColumn)
		}
	}
	return nil
}

// Text returns a field, empty where t has no such column.
func (t *Table) Text(row int, column string) string {
	if i, ok := t.index[column]; ok {
		return t.Rows[row][i]
	}
	return ""
}

// Float returns a field as a number: NaN where it is empty or the column is missing, ±Inf for inf and
// -inf. The error names file, line and column.
func (t *Table) Float(row int, column string) (float64, error) {
	text := t.Text(row, column)
	switch text {
	case "":
		return math.NaN(), nil
	case "inf":
		return math.Inf(1), nil
	case "-inf":
		return math.Inf(-1), nil
	}
	v, err := strconv.ParseFloat(text, 64)
	if err != nil || math.IsNaN(v) || math.IsInf(v, 0) {
		return 0, t.wrong(row, column, "a number")
	}
	return v, nil
}

// Int returns a field as a whole number. An empty one is an error too.
func (t *Table) Int(row int, column string) (int, error) {
	v, err := strconv.Atoi(t.Text(row, column))
	if err != nil {
		return 0, t.wrong(row, column, "a whole number")
	}
	return v, nil
}

// Bool returns whether a field is 1; what is neither 1 nor 0 is an error.
func (t *Table) Bool(row int, column string) (bool, error) {
	switch t.Text(row, column) {
	case "1":
		return true, nil
	case "0":
		return false, nil
	}
	return false, t.wrong(row, column, "1 or 0")
}

func (t *Table) wrong(row int, column, want string) error {
	return fmt.Errorf("tables: %s line %d, column %s: %q, want %s", t.Name, t.Lines[row], column, t.Text(row, column), want)
}

// rowWriter writes CSV rows and keeps the first error.
type rowWriter struct {
	w      io.Writer
	csv    *csv.Writer
	fields int
	err    error
}

func newRowWriter(w io.Writer, columns []string) *rowWriter {
	out := &rowWriter{w: w, csv: csv.NewWriter(w), fields: len(columns)}
	out.write(columns...)
	return out
}

// write adds a row. It panics if there are not as many fields as columns.
func (out *rowWriter) write(fields ...string) {
	if len(fields) != out.fields {
		panic(fmt.Sprintf("tables: %d fields for %d columns", len(fields), out.fields))
	}
	if out.err != nil {
		return
	}
	if len(fields) == 1 && fields[0] == "" {
		// A lone empty field would be a blank line, which a reader skips.
		out.csv.Flush()
		_, out.err = io.WriteString(out.w, "\"\"\n")
		return
	}
	out.err = out.csv.Write(fields)
}

func (out *rowWriter) flush() error {
	if out.err != nil {
		return out.err
	}
	out.csv.Flush()
	return out.csv.Error()
}

// digits prints v with so many significant digits; fixed with so many decimals.
func digits(v float64, n int) string { return number(v, 'g', n) }
func fixed(v float64, n int) string  { return number(v, 'f', n) }

func number(v float64, format byte, n int) string {
	switch {
	case math.IsNaN(v):
		return ""
	case math.IsInf(v, 1):
		return "inf"
	case math.IsInf(v, -1):
		return "-inf"
	}
	s := strconv.FormatFloat(v, format, n, 64)
	if s[0] == '-' && strings.Trim(s, "-0.") == "" {
		return s[1:] // no negative zero
	}
	return s
}

func flag(b bool) string {
	if b {
		return "1"
	}
	return "0"
}
