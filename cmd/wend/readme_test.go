package main

import (
	"bytes"
	"context"
	"flag"
	"fmt"
	"os"
	"path/filepath"
	"regexp"
	"strings"
	"testing"

	"github.com/spf13/cobra"

	"wend/cmd/wend/internal/movie"
	"wend/cmd/wend/internal/tables"
)

var update = flag.Bool("update", false, "renew the table of codes in README.md")

func readme(t *testing.T) string {
	t.Helper()
	text, err := os.ReadFile("../../README.md")
	if err != nil {
		t.Fatal(err)
	}
	return string(text)
}

// The README's first commands are the ones that set up, in their order, right under the paragraph.
func TestReadmeOpensWithSetUp(t *testing.T) {
	var commands []string
	for _, line := range strings.Split(readme(t), "\n") {
		if strings.HasPrefix(line, "    make ") {
			commands = append(commands, strings.Fields(line)[1])
		}
		if strings.HasPrefix(line, "## ") {
			break
		}
	}
	if got := strings.Join(commands, " "); got != "demo test" {
		t.Errorf("commands at the top of README: %q, want demo and test", got)
	}
}

// Every shell example of the README and of the commands' help runs as it stands, given its files.
func TestExamplesRun(t *testing.T) {
	var lines []string
	for _, block := range regexp.MustCompile("(?s)```sh\n(.*?)```").FindAllStringSubmatch(readme(t), -1) {
		lines = append(lines, strings.Split(strings.TrimSpace(block[1]), "\n")...)
	}
	if len(lines) < 5 {
		t.Fatalf("%d examples in README, want 5 or more", len(lines))
	}
	root := newRootCommand()
	for _, c := range append(root.Commands(), root) {
		if c.Example == "" && !c.Hidden {
			t.Errorf("%s has no example", c.Name())
		}
		for _, line := range strings.Split(c.Example, "\n") {
			if line = strings.TrimSpace(line); line != "" {
				lines = append(lines, line)
			}
		}
	}
	t.Chdir(t.TempDir())
	o := movie.DefaultOptions()
	o.Frames, o.WidthPx, o.HeightPx, o.LengthUm, o.WanderUm = 6, 90, 76, 5, 0.2
	m, err := movie.New(o)
	if err != nil {
		t.Fatal(err)
	}
	if err := m.Write(t.Context(), "made", nil); err != nil {
		t.Fatal(err)
	}
	for _, name := range []string{"movie.tif", "movie.ome.tif", "one.ome.tif", "two.ome.tif"} {
		if err := os.Link("made/synth.ome.tif", name); err != nil {
			t.Fatal(err)
		}
	}
	seen := make(map[string]bool)
	for _, line := range lines {
		if seen[line] {
			continue
		}
		seen[line] = true
		words := strings.Fields(line)
		if words[0] != "wend" {
			t.Errorf("example %q does not start with wend", line)
			continue
		}
		args := words[1:]
		if i := len(args); args[0] == "synth" { // shorter, to be quick
			args = append(args[:i:i], "--frames", "6")
		}
		args = expand(t, args)
		var stdout, stderr bytes.Buffer
		if status := run(context.Background(), args, &stdout, &stderr); status != exitDone {
			t.Errorf("%s: exit status %d: %s", line, status, stderr.String())
		}
	}
}

// expand does what a shell does with a star; one.ome.tif and two.ome.tif are not *.tif here, to keep names apart.
func expand(t *testing.T, args []string) []string {
	var out []string
	for _, a := range args {
		if !strings.Contains(a, "*") {
			out = append(out, a)
			continue
		}
		paths, err := filepath.Glob(strings.Replace(a, "*", "movie", 1))
		if err != nil || len(paths) == 0 {
			t.Fatalf("nothing matches %s", a)
		}
		out = append(out, paths...)
	}
	return out
}

// The README speaks of no flag that does not exist, and of every flag of measure.
func TestReadmeFlags(t *testing.T) {
	text := readme(t)
	known := map[string]bool{"--help": true, "--version": true}
	var measureFlags []string
	for _, c := range newRootCommand().Commands() {
		for _, f := range flagsOf(c) {
			known[f] = true
			if c.Name() == "measure" {
				measureFlags = append(measureFlags, f)
			}
		}
	}
	for _, f := range regexp.MustCompile(`--[a-z][a-z-]*`).FindAllString(text, -1) {
		if !known[f] {
			t.Errorf("README names %s, which no command has", f)
		}
	}
	if len(measureFlags) < 10 {
		t.Fatalf("measure has the flags %v, want more", measureFlags)
	}
	for _, f := range measureFlags {
		if !strings.Contains(text, "`"+f) {
			t.Errorf("README does not explain %s", f)
		}
	}
}

func flagsOf(c *cobra.Command) []string {
	var out []string
	for _, f := range regexp.MustCompile(`--[a-z][a-z-]*`).FindAllString(c.Flags().FlagUsages(), -1) {
		if c.Flags().Lookup(f[2:]) != nil {
			out = append(out, f)
		}
	}
	return out
}

// The Go that the README asks for is the one that go.mod needs.
func TestReadmeGoVersion(t *testing.T) {
	mod, err := os.ReadFile("../../go.mod")
	if err != nil {
		t.Fatal(err)
	}
	need := regexp.MustCompile(`(?m)^go (\d+\.\d+)`).FindSubmatch(mod)
	if need == nil {
		t.Fatal("go.mod has no go line")
	}
	if want := fmt.Sprintf("Go %s or later", need[1]); !strings.Contains(readme(t), want) {
		t.Errorf("README does not say %q", want)
	}
}

// The columns that the README explains stand in the filaments.csv that measure writes.
func TestReadmeColumns(t *testing.T) {
	_, section, ok := strings.Cut(readme(t), "The columns of `filaments.csv` to look at first:")
	if !ok {
		t.Fatal("README does not explain the columns of filaments.csv")
	}
	section, _, _ = strings.Cut(section, "Lengths are µm")
	var named []string
	for _, line := range strings.Split(section, "\n") {
		if cells := strings.Split(line, "|"); len(cells) > 2 {
			for _, m := range regexp.MustCompile("`([a-z_]+)`").FindAllStringSubmatch(cells[1], -1) {
				named = append(named, m[1])
			}
		}
	}
	if len(named) < 10 {
		t.Fatalf("README explains the columns %v, want more", named)
	}
	stack, err := filepath.Abs(demoStack)
	if err != nil {
		t.Fatal(err)
	}
	t.Chdir(t.TempDir())
	must(t, exitDone, "measure", stack, "--setting", "free", "--frames", "0-7")
	rows := table(t, "wend-out/demo/filaments.csv")
	if len(rows) == 0 {
		t.Fatal("no filament in the demo")
	}
	for _, name := range named {
		if _, ok := rows[0][name]; !ok {
			t.Errorf("README explains the column %s, which filaments.csv does not have", name)
		}
	}
}

// The codes in the README are those of the code, each with its sentence.
func TestReadmeCodes(t *testing.T) {
	const from, to = "-update renews it -->\n", "<!-- end of codes -->"
	text := readme(t)
	start, end := strings.Index(text, from), strings.Index(text, to)
	if start < 0 || end < start {
		t.Fatal("README has no place for the codes")
	}
	start += len(from)
	var want strings.Builder
	fmt.Fprint(&want, "| where | code | what it means |\n|---|---|---|\n")
	for _, c := range tables.Codes() {
		fmt.Fprintf(&want, "| %s | `%s` | %s |\n", c.Kind, c.Code, c.Meaning)
	}
	if got := text[start:end]; got != want.String() {
		if !*update {
			t.Fatal("README's codes are not those of the code: go test ./cmd/wend -run ReadmeCodes -update")
		}
		if err := os.WriteFile("../../README.md", []byte(text[:start]+want.String()+text[end:]), 0o644); err != nil {
			t.Fatal(err)
		}
	}
}
