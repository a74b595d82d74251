package tables

import (
	"bytes"
	"errors"
	"go/ast"
	"go/parser"
	"go/token"
	"io"
	"math"
	"os"
	"path/filepath"
	"reflect"
	"strconv"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
	"github.com/google/go-cmp/cmp/cmpopts"

	"wend/cmd/wend/internal/job"
	"wend/cmd/wend/internal/tables/tablestest"
	"wend/trace"
)

var files = []string{FilamentsFile, EstimatesFile, FramesFile, ContoursFile, ModesFile, TangentFile, TubeFile, LagsFile, SummaryFile}

func write(t *testing.T, r *job.Result) string {
	t.Helper()
	dir := filepath.Join(t.TempDir(), "new", "folder")
	if err := Write(dir, r); err != nil {
		t.Fatal(err)
	}
	return dir
}

func contents(t *testing.T, dir, name string) string {
	t.Helper()
	b, err := os.ReadFile(filepath.Join(dir, name))
	if err != nil {
		t.Fatal(err)
	}
	return string(b)
}

// The columns that users' scripts rely on, as the README lists them; frames.csv has six more at its end.
func TestHeaders(t *testing.T) {
	dir := write(t, tablestest.Result(0, 3))
	for name, want := range map[string]string{
		"filaments.csv": "filament,first_frame,last_frame,frames_used,frames_rejected,length_um,length_sd_um,end_0,end_1,snr,photons_per_um,background_per_um2,psf_nm,localisation_nm,shapes,thermal,confinement,lp_um,lp_low_um,lp_high_um,lp_from,tube_rms_um,tube_rms_low_um,tube_rms_high_um,mesh_um,mesh_low_um,mesh_high_um,mesh_from,flags",
		"estimates.csv": "filament,quantity,method,value,low,high,note",
		"frames.csv":    "filament,frame,time_s,used,reason,length_um,end_to_end_um,x_um,y_um,snr,photons_per_um,width_nm,se_nm,noise_um3,length_se_um,background_per_um2,end_0,end_1,end_0_se_um,end_1_se_um",
		"contours.csv":  "filament,frame,point,s_um,x_um,y_um,se_nm",
		"modes.csv":     "filament,mode,wavelength_um,mean_amplitude,variance,noise_variance,blur_factor,thermal_variance,lp_um,lp_low_um,lp_high_um,relaxation_s,shapes,used,reason",
		"tangent.csv":   "filament,separation_um,cos_mean,cos_low,cos_high,pairs,used",
		"tube.csv":      "filament,s_um,rms_um,rms_low_um,rms_high_um,noise_um",
		"lags.csv":      "filament,lag_s,transverse_msd_um2,longitudinal_msd_um2,pairs",
	} {
		if got := contents(t, dir, name); got != want+"\n" {
			t.Errorf("%s without a filament:\n got %q\nwant %q", name, got, want+"\n")
		}
	}
	left, err := filepath.Glob(filepath.Join(dir, ".*"))
	if err != nil || len(left) != 0 {
		t.Errorf("left behind: %v (%v)", left, err)
	}
}

// What is written, read and written again must be the same bytes.
func TestWriteReadWrite(t *testing.T) {
	for _, r := range []*job.Result{tablestest.Result(4, 25), tablestest.Result(0, 4), tablestest.Result(1, 2)} {
		first := write(t, r)
		back, err := Read(first)
		if err != nil {
			t.Fatal(err)
		}
		second := write(t, back)
		for _, name := range files {
			if a, b := contents(t, first, name), contents(t, second, name); a != b {
				t.Errorf("%s changed:\n%s", name, cmp.Diff(a, b))
			}
		}
	}
}

// The contours must come back to the bit: the analysis from saved contours depends on it.
func TestTracesComeBackToTheBit(t *testing.T) {
	r := tablestest.Result(3, 30)
	dir := write(t, r)
	got, times, err := ReadTraces(dir)
	if err != nil {
		t.Fatal(err)
	}
	var want []trace.Filament
	for _, f := range r.Filaments {
		want = append(want, f.Filament)
	}
	if len(want) != 3 || len(want[0].Contours) != 30 || len(want[0].Contours[0].Points) < 50 {
		t.Fatal("the fixture lost its filaments")
	}
	if d := cmp.Diff(want, got, cmpopts.EquateNaNs(), cmpopts.IgnoreUnexported(trace.Contour{})); d != "" {
		t.Error(d)
	}
	if !reflect.DeepEqual(times, r.TimesS) {
		t.Errorf("times: %v, want %v", times, r.TimesS)
	}
}

// A result that nobody rounded is printed as if it had been.
func TestWriteRounds(t *testing.T) {
	r := tablestest.Result(1, 3)
	c := &r.Filaments[0].Contours[0]
	c.Points[1].XUm, c.Points[1].SEUm, c.NoiseUm3, c.SNR = 12.3456789, 0.0123456, 1.23456789e-5, 8.123456
	dir := write(t, r)
	if got := strings.Split(contents(t, dir, ContoursFile), "\n")[2]; !strings.Contains(got, ",12.34568,") || !strings.HasSuffix(got, ",12.35") {
		t.Errorf("contour row %q, want x 12.34568 and error 12.35", got)
	}
	if c.Points[1].XUm != 12.3456789 {
		t.Error("Write altered the result")
	}
	back, _, err := ReadTraces(dir)
	if err != nil {
		t.Fatal(err)
	}
	r.Filaments[0].Quantise()
	if d := cmp.Diff(r.Filaments[0].Filament, back[0], cmpopts.EquateNaNs(), cmpopts.IgnoreUnexported(trace.Contour{})); d != "" {
		t.Error(d)
	}
}

func point(s, x, y, se float64) trace.Point { return trace.Point{SUm: s, XUm: x, YUm: y, SEUm: se} }

func TestDerivedColumns(t *testing.T) {
	r := tablestest.Result(1, 2)
	f := &r.Filaments[0]
	// A 3-4-5 triangle: ends 5 µm apart, centre of the three corners at (1+4+4)/3, (2+2+6)/3.
	f.Contours[0] = trace.Contour{Frame: 0, LengthUm: 7, Points: []trace.Point{point(0, 1, 2, 0.010), point(3, 4, 2, 0.030), point(7, 4, 6, 0.011)}}
	f.Contours[1] = trace.Contour{Frame: 1}
	f.FramesUsed = 1
	tab, err := ReadTable(strings.NewReader(contents(t, write(t, r), FramesFile)), FramesFile)
	if err != nil {
		t.Fatal(err)
	}
	want := map[string]string{"end_to_end_um": "5.00000", "x_um": "3.00000", "y_um": "3.33333", "se_nm": "11.00", "used": "1", "reason": "", "time_s": "0.000000"}
	for column, text := range want {
		if got := tab.Text(0, column); got != text {
			t.Errorf("%s = %q, want %q", column, got, text)
		}
	}
	for column, text := range map[string]string{"used": "0", "reason": "missing", "snr": "", "length_um": "", "x_um": ""} {
		if got := tab.Text(1, column); got != text {
			t.Errorf("frame without points: %s = %q, want %q", column, got, text)
		}
	}
}

func TestBoundAndRefusal(t *testing.T) {
	tab, err := ReadTable(strings.NewReader(contents(t, write(t, tablestest.Result(3, 20)), FilamentsFile)), FilamentsFile)
	if err != nil || len(tab.Rows) != 3 {
		t.Fatalf("%d rows, want 3 (%v)", len(tab.Rows), err)
	}
	if tab.Text(1, "lp_um") != "" || tab.Text(1, "lp_low_um") == "" || tab.Text(1, "lp_high_um") != "inf" || tab.Text(1, "lp_from") != "bound" {
		t.Errorf("a lower bound is written as %q", tab.Rows[1])
	}
	if tab.Text(2, "lp_um")+tab.Text(2, "lp_low_um")+tab.Text(2, "lp_high_um") != "" || tab.Text(2, "flags") != "pinned;changing" {
		t.Errorf("a refusal is written as %q", tab.Rows[2])
	}
	used, err := tab.Int(0, "frames_used")
	rejected, err2 := tab.Int(0, "frames_rejected")
	if err != nil || err2 != nil || used+rejected != 20 {
		t.Errorf("%d frames used and %d rejected, want 20 together", used, rejected)
	}
}

// The same result gives the same bytes wherever the stack lies.
func TestSummaryHasNoPath(t *testing.T) {
	r := tablestest.Result(1, 4)
	a := contents(t, write(t, r), SummaryFile)
	r.StackPath, r.Info.Path = `C:\elsewhere\invented.ome.tif`, `C:\elsewhere\invented.ome.tif`
	b := contents(t, write(t, r), SummaryFile)
	if a != b || strings.Contains(a, "folder") || !strings.Contains(a, `"invented.ome.tif"`) {
		t.Errorf("summaries differ or hold a path:\n%s\n%s", a, b)
	}
	if !strings.Contains(a, "OME-XML PhysicalSizeX") || !strings.Contains(a, r.SHA256) {
		t.Errorf("no source or hash in %s", a)
	}
}

// Every code of the tracer and of the analysis must have its sentence.
func TestEveryCodeIsExplained(t *testing.T) {
	found := 0
	for _, source := range []struct {
		dir, prefix string
		kind        Kind
	}{
		{"trace", "Reason", KindFrame}, {"trace", "End", KindEnd},
		{"modes", "Flag", KindFlag}, {"modes", "Reason", KindMode}, {"modes", "Method", KindMethod}, {"modes", "From", KindMethod},
		{"modes", "Thermal", KindThermal}, {"modes", "Confinement", KindConfinement},
	} {
		for _, code := range constants(t, "../../../../"+source.dir, source.prefix) {
			found++
			if _, ok := Meaning(source.kind, code); !ok {
				t.Errorf("no sentence for %s %q of package %s", source.kind, code, source.dir)
			}
		}
	}
	if found < 13 { // those of trace alone
		t.Errorf("found %d codes, want at least 13", found)
	}
	seen := map[Code]bool{}
	for _, c := range Codes() {
		key := Code{Kind: c.Kind, Code: c.Code}
		if seen[key] {
			t.Errorf("%s %q stands there twice", c.Kind, c.Code)
		}
		seen[key] = true
		if strings.ContainsAny(c.Code, "; ,") || !strings.HasSuffix(c.Meaning, ".") {
			t.Errorf("%s %q: %q", c.Kind, c.Code, c.Meaning)
		}
	}
}

// constants lists the string constants in a package's source whose name is prefix and then a capital letter.
func constants(t *testing.T, dir, prefix string) []string {
	t.Helper()
	names, err := filepath.Glob(filepath.Join(dir, "*.go"))
	if err != nil {
		t.Fatal(err)
	}
	var values []string
	for _, name := range names {
		file, err := parser.ParseFile(token.NewFileSet(), name, nil, 0)
		if err != nil {
			t.Fatal(err)
		}
		for _, d := range file.Decls {
			decl, ok := d.(*ast.GenDecl)
			if !ok || decl.Tok != token.CONST {
				continue
			}
			for _, s := range decl.Specs {
				spec := s.(*ast.ValueSpec)
				for i, id := range spec.Names {
					rest, ok := strings.CutPrefix(id.Name, prefix)
					if !ok || rest == "" || rest[0] < 'A' || rest[0] > 'Z' || i >= len(spec.Values) {
						continue
					}
					if lit, ok := spec.Values[i].(*ast.BasicLit); ok && lit.Kind == token.STRING {
						text, err := strconv.Unquote(lit.Value)
						if err != nil {
							t.Fatal(err)
						}
						values = append(values, text)
					}
				}
			}
		}
	}
	return values
}

func TestReadErrorsNameThePlace(t *testing.T) {
	dir := write(t, tablestest.Result(1, 3))
	good := contents(t, dir, FramesFile)
	for _, tc := range []struct{ from, to, want string }{
		{"1,1,0.100000", "1,2,0.100000", "frames.csv line 3, column frame"},
		{"1,1,0.100000", "1,one,0.100000", "frames.csv line 3, column frame"},
		{"1,1,0.100000", "1,1,soon", "frames.csv line 3, column time_s"},
		{"1,1,0.100000", "1,1,0.1,7", "frames.csv line 3: 21 fields, want 20"},
		{"time_s", "time", `column "time_s": no such column`},
		{"1,0,0.000000", "1,99999999,0.000000", "want 0 to 10000000"},
	} {
		if !strings.Contains(good, tc.from) {
			t.Fatalf("the fixture has no %q", tc.from)
		}
		if err := os.WriteFile(filepath.Join(dir, FramesFile), []byte(strings.Replace(good, tc.from, tc.to, 1)), 0o644); err != nil {
			t.Fatal(err)
		}
		filaments, times, err := ReadTraces(dir)
		if err == nil || !strings.Contains(err.Error(), tc.want) || filaments != nil || times != nil {
			t.Errorf("%q for %q: error %v, want one with %q", tc.to, tc.from, err, tc.want)
		}
		if tc.to == "time" && !errors.Is(err, ErrColumn) {
			t.Errorf("%v does not wrap ErrColumn", err)
		}
	}
}

func TestColumnsByName(t *testing.T) {
	tab, err := ReadTable(strings.NewReader("\ufeffb,extra,a\r\n1,x,\r\ninf,y,2.5\r\n"), "t.csv")
	if err != nil {
		t.Fatal(err)
	}
	if v, err := tab.Float(0, "a"); err != nil || !math.IsNaN(v) {
		t.Errorf("empty field: %v, %v, want NaN", v, err)
	}
	if v, err := tab.Float(1, "b"); err != nil || !math.IsInf(v, 1) {
		t.Errorf("inf: %v, %v", v, err)
	}
	if _, err := tab.Float(1, "extra"); err == nil || !strings.Contains(err.Error(), "t.csv line 3, column extra") {
		t.Errorf("error %v does not name the place", err)
	}
}

func TestWriteFileLeavesNothingOnError(t *testing.T) {
	dir := t.TempDir()
	boom := errors.New("boom")
	err := WriteFile(dir, "x.csv", func(w io.Writer) error {
		w.Write([]byte("half"))
		return boom
	})
	if !errors.Is(err, boom) {
		t.Errorf("error %v, want boom", err)
	}
	entries, err := os.ReadDir(dir)
	if err != nil || len(entries) != 0 {
		t.Errorf("left behind: %v (%v)", entries, err)
	}
}

// What reads must write and read back the same; what does not gives no table.
func FuzzReadTable(f *testing.F) {
	for _, seed := range []string{"", "a,b\n1,2\n", "\ufeffa\n\"\"\n\n", "a,\"b\nc\"\n\"x\"\"y\",inf\n", "a,a\n", "a\n1,2\n", "a,b\r\n,\r\n", "a\n\\.\n"} {
		f.Add([]byte(seed))
	}
	f.Fuzz(func(t *testing.T, data []byte) {
		tab, err := ReadTable(bytes.NewReader(data), "fuzz.csv")
		if err != nil {
			if tab != nil {
				t.Fatal("a table with an error")
			}
			return
		}
		for row := range tab.Rows {
			for _, column := range tab.Columns {
				tab.Float(row, column)
				tab.Int(row, column)
				tab.Bool(row, column)
			}
		}
		var out bytes.Buffer
		if err := tab.Write(&out); err != nil {
			t.Fatal(err)
		}
		again, err := ReadTable(bytes.NewReader(out.Bytes()), "fuzz.csv")
		if err != nil {
			t.Fatalf("%v in %q", err, out.String())
		}
		if !reflect.DeepEqual(tab.Columns, again.Columns) || !reflect.DeepEqual(tab.Rows, again.Rows) {
			t.Fatalf("%q became %q", tab.Rows, again.Rows)
		}
	})
}

// Hostile contours and frames give an error or a result, never a panic.
func FuzzReadTraces(f *testing.F) {
	f.Add([]byte("filament,frame,time_s,used,reason,noise_um3\n1,0,0,1,,1e-5\n"), []byte("filament,frame,point,s_um,x_um,y_um,se_nm\n1,0,0,0,1,1,9\n1,0,1,0.1,1.1,1,9\n"))
	f.Add([]byte("filament,frame,time_s,used,reason,noise_um3\n1,5,,0,missing,\n2,3,,0,fit,\n"), []byte("filament,frame,point,s_um,x_um,y_um,se_nm\n2,3,0,,,,\n"))
	f.Fuzz(func(t *testing.T, frames, contours []byte) {
		dir := t.TempDir()
		if os.WriteFile(filepath.Join(dir, FramesFile), frames, 0o644) != nil || os.WriteFile(filepath.Join(dir, ContoursFile), contours, 0o644) != nil {
			t.Skip()
		}
		filaments, _, err := ReadTraces(dir)
		if err != nil && filaments != nil {
			t.Fatal("filaments with an error")
		}
		for _, fil := range filaments {
			if len(fil.Contours) != fil.Last-fil.First+1 {
				t.Fatalf("filament %d: %d contours for frames %d to %d", fil.ID, len(fil.Contours), fil.First, fil.Last)
			}
		}
	})
}
