// Coverage answers: how often do the 95 % intervals of the persistence length hold the truth, and is the estimate biased?
//
// It draws contours of free filaments with known stiffness, drag and noise over a grid of movies, analyses each as a measured one
// would be, and prints a row per kind of movie, the worst first.
package main

import (
	"flag"
	"fmt"
	"io"
	"math"
	"math/rand/v2"
	"os"
	"runtime"
	"sort"
	"sync"

	"wend/modes"
)

func main() { os.Exit(run(os.Args[1:], os.Stdout, os.Stderr)) }

func run(args []string, stdout, stderr io.Writer) int {
	fs := flag.NewFlagSet("coverage", flag.ContinueOnError)
	fs.SetOutput(stderr)
	reps := fs.Int("repeats", 100, "`movies` per condition")
	count := fs.Int("conditions", 36, "`number` of conditions")
	seed := fs.Uint64("seed", 1, "`seed` of the draws")
	workers := fs.Int("workers", runtime.NumCPU(), "`number` of movies at a time")
	if err := fs.Parse(args); err != nil {
		return 2
	}
	if fs.NArg() > 0 || *reps < 1 || *count < 1 || *workers < 1 {
		fmt.Fprintln(stderr, "coverage: want positive numbers and no arguments")
		return 2
	}
	rows := cover(conditions(*count), *reps, *seed, *workers)
	sort.SliceStable(rows, func(i, j int) bool { return rows[i].lp.covered() < rows[j].lp.covered() })
	write(stdout, rows)
	return 0
}

// tally gathers estimates of one quantity by one method.
type tally struct {
	n, held, lowMiss, highMiss, open, none int
	errors, widths                         []float64 // of the logarithm
}

// enter adds an estimate of truth: value NaN where there is only a bound, and low NaN where there is nothing.
func (t *tally) enter(value, low, high, truth float64) {
	t.n++
	switch {
	case math.IsNaN(low):
		t.none++
		return
	case low > truth:
		t.lowMiss++
	case high < truth:
		t.highMiss++
	default:
		t.held++
	}
	if math.IsInf(high, 1) || math.IsNaN(value) {
		t.open++
		return
	}
	t.errors = append(t.errors, math.Log(value/truth))
	t.widths = append(t.widths, math.Log(high/low)/(2*1.959964))
}

func (t tally) covered() float64 { return float64(t.held) / float64(t.n-t.none) }

// bias returns mean and root mean square of the logarithmic error, and the median of what the intervals predict for it.
func (t tally) bias() (mean, rms, predicted float64) {
	for _, e := range t.errors {
		mean += e / float64(len(t.errors))
		rms += e * e / float64(len(t.errors))
	}
	if len(t.widths) == 0 {
		return math.NaN(), math.NaN(), math.NaN()
	}
	w := append([]float64(nil), t.widths...)
	sort.Float64s(w)
	return mean, math.Sqrt(rms), w[len(w)/2]
}

// row is what a condition gave.
type row struct {
	condition
	lp, drag, modes, tangent, distance tally
	thermal, not, tube, pinned         int
	changing, disagree                 int
}

// cover analyses reps movies of every condition.
func cover(cs []condition, reps int, seed uint64, workers int) []row {
	results := make([]modes.Result, len(cs)*reps)
	jobs := make(chan int)
	var wait sync.WaitGroup
	for range workers {
		wait.Add(1)
		go func() {
			defer wait.Done()
			for j := range jobs {
				rng := rand.New(rand.NewPCG(seed, uint64(j)))
				results[j] = modes.Analyse(simulate(cs[j/reps], rng), modes.DefaultOptions())
			}
		}()
	}
	for j := range results {
		jobs <- j
	}
	close(jobs)
	wait.Wait()
	var rows []row
	for i, c := range cs {
		r := row{condition: c}
		for _, res := range results[i*reps : (i+1)*reps] {
			r.lp.enter(res.LpUm, res.LpLowUm, res.LpHighUm, c.lpUm)
			for _, e := range res.Estimates {
				switch {
				case e.Quantity == modes.QuantityDrag:
					r.drag.enter(e.Value, e.Low, e.High, c.dragPaS)
				case e.Quantity != modes.QuantityLp:
				case e.Method == modes.MethodModes:
					r.modes.enter(e.Value, e.Low, e.High, c.lpUm)
				case e.Method == modes.MethodTangent:
					r.tangent.enter(e.Value, e.Low, e.High, c.lpUm)
				case e.Method == modes.MethodDistance:
					r.distance.enter(e.Value, e.Low, e.High, c.lpUm)
				}
			}
			switch res.Thermal {
			case modes.ThermalYes:
				r.thermal++
			case modes.ThermalNo:
				r.not++
			}
			for _, f := range res.Flags {
				switch f {
				case modes.FlagChanging:
					r.changing++
				case modes.FlagConfined:
					r.tube++
				case modes.FlagPinned:
					r.pinned++
				case modes.FlagModesDisagree:
					r.disagree++
				}
			}
		}
		rows = append(rows, r)
	}
	return rows
}

// write prints the rows and, last, all of them together.
func write(w io.Writer, rows []row) {
	fmt.Fprintln(w, "drag mPa·s | length µm | Lp µm | frames | interval s | exposure s | noise µm³ | noise scale | n | covered | low > truth | high < truth | open | bias ln | rms ln | predicted | drag covered | modes covered | bias | tangent covered | bias | distance covered | bias | thermal yes | no | tube | pinned | changing | modes disagree")
	var all row
	for _, r := range rows {
		mean, rms, predicted := r.lp.bias()
		modesBias, _, _ := r.modes.bias()
		tangentBias, _, _ := r.tangent.bias()
		distanceBias, _, _ := r.distance.bias()
		fmt.Fprintf(w, "%.1f | %.0f | %.0f | %d | %.1f | %.2f | %.0e | %.2f | %d | %.3f | %d | %d | %d | %+.3f | %.3f | %.3f | %.3f | %.3f | %+.3f | %.3f | %+.3f | %.3f | %+.3f | %d | %d | %d | %d | %d | %d\n",
			r.dragPaS*1e3, r.lengthUm, r.lpUm, r.frames, r.intervalS, r.exposureS, r.noiseUm3, r.noiseScale, r.lp.n,
			r.lp.covered(), r.lp.lowMiss, r.lp.highMiss, r.lp.open, mean, rms, predicted,
			r.drag.covered(), r.modes.covered(), modesBias, r.tangent.covered(), tangentBias, r.distance.covered(), distanceBias, r.thermal, r.not, r.tube, r.pinned, r.changing, r.disagree)
		all.thermal, all.not, all.tube, all.pinned = all.thermal+r.thermal, all.not+r.not, all.tube+r.tube, all.pinned+r.pinned
		all.changing, all.disagree = all.changing+r.changing, all.disagree+r.disagree
		all.lp.n, all.lp.held, all.lp.none = all.lp.n+r.lp.n, all.lp.held+r.lp.held, all.lp.none+r.lp.none
		all.drag.n, all.drag.held, all.drag.none = all.drag.n+r.drag.n, all.drag.held+r.drag.held, all.drag.none+r.drag.none
		all.modes.n, all.modes.held, all.modes.none = all.modes.n+r.modes.n, all.modes.held+r.modes.held, all.modes.none+r.modes.none
		all.tangent.n, all.tangent.held, all.tangent.none = all.tangent.n+r.tangent.n, all.tangent.held+r.tangent.held, all.tangent.none+r.tangent.none
		all.distance.n, all.distance.held, all.distance.none = all.distance.n+r.distance.n, all.distance.held+r.distance.held, all.distance.none+r.distance.none
		all.lp.errors = append(all.lp.errors, r.lp.errors...)
		all.lp.widths = append(all.lp.widths, r.lp.widths...)
	}
	mean, rms, _ := all.lp.bias()
	fmt.Fprintf(w, "all: %d movies, covered %.3f, drag %.3f, modes %.3f, tangent %.3f, distance %.3f, bias ln %+.3f, rms ln %.3f, thermal yes %d, no %d, tube %d, pinned %d, changing %d, modes disagree %d, not answered %d\n",
		all.lp.n, all.lp.covered(), all.drag.covered(), all.modes.covered(), all.tangent.covered(), all.distance.covered(), mean, rms,
		all.thermal, all.not, all.tube, all.pinned, all.changing, all.disagree, all.lp.none)
}
