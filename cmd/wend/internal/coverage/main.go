// Coverage answers: how often do the 95 % intervals of the persistence length hold the truth, and is the estimate biased?
//
// It draws contours of free filaments with known stiffness, drag and noise over a grid of movies, analyses each as a measured one
// would be, and prints a row per level of every quantity, the overall figures, and, with -v, a row per condition, the worst first.
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
	"text/tabwriter"

	"wend/modes"
)

func main() { os.Exit(run(os.Args[1:], os.Stdout, os.Stderr)) }

func run(args []string, stdout, stderr io.Writer) int {
	fs := flag.NewFlagSet("coverage", flag.ContinueOnError)
	fs.SetOutput(stderr)
	reps := fs.Int("repeats", 10, "`movies` per condition")
	count := fs.Int("conditions", 140, "`number` of conditions")
	seed := fs.Uint64("seed", 1, "`seed` of the draws")
	workers := fs.Int("workers", runtime.NumCPU(), "`number` of movies at a time")
	verbose := fs.Bool("v", false, "a row for every condition too")
	if err := fs.Parse(args); err != nil {
		return 2
	}
	if fs.NArg() > 0 || *reps < 1 || *count < 1 || *workers < 1 {
		fmt.Fprintln(stderr, "coverage: want positive numbers and no arguments")
		return 2
	}
	rows := cover(conditions(*count), *reps, *seed, *workers)
	if *verbose {
		sort.SliceStable(rows, func(i, j int) bool { return rows[i].lp.covered() < rows[j].lp.covered() })
		writeConditions(stdout, rows)
	}
	writeLevels(stdout, rows)
	return 0
}

// row is what a condition gave.
type row struct {
	condition
	boundSD                                          float64
	lp, drag, modes, tangent, distance, distribution tally
	yes, no, tube, pinned                            int
	changing, disagree                               int
}

// cover analyses reps movies of every condition.
func cover(cs []condition, reps int, seed uint64, workers int) []row {
	results := make([]modes.Result, len(cs)*reps)
	rows := make([]row, len(cs))
	jobs := make(chan int)
	var wait sync.WaitGroup
	for range workers {
		wait.Go(func() {
			for j := range jobs {
				c := cs[j/reps]
				if j%reps == 0 {
					rows[j/reps] = row{condition: c, boundSD: c.bound()}
				}
				rng := rand.New(rand.NewPCG(seed, uint64(j)))
				results[j] = modes.Analyse(simulate(c, rng), modes.DefaultOptions())
			}
		})
	}
	for j := range results {
		jobs <- j
	}
	close(jobs)
	wait.Wait()
	for i := range rows {
		for _, res := range results[i*reps : (i+1)*reps] {
			rows[i].enter(res)
		}
	}
	return rows
}

// enter adds a movie's result.
func (r *row) enter(res modes.Result) {
	r.lp.enter(res.LpUm, res.LpLowUm, res.LpHighUm, r.lpUm, r.boundSD)
	for _, e := range res.Estimates {
		switch {
		case e.Quantity == modes.QuantityDrag:
			r.drag.enter(e.Value, e.Low, e.High, r.dragPaS, math.Inf(1))
		case e.Quantity != modes.QuantityLp:
		case e.Method == modes.MethodModes:
			r.modes.enter(e.Value, e.Low, e.High, r.lpUm, r.boundSD)
		case e.Method == modes.MethodTangent:
			r.tangent.enter(e.Value, e.Low, e.High, r.lpUm, r.boundSD)
		case e.Method == modes.MethodDistance:
			r.distance.enter(e.Value, e.Low, e.High, r.lpUm, r.boundSD)
		case e.Method == modes.MethodDistribution:
			r.distribution.enter(e.Value, e.Low, e.High, r.lpUm, r.boundSD)
		}
	}
	switch res.Thermal {
	case modes.ThermalYes:
		r.yes++
	case modes.ThermalNo:
		r.no++
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

// add adds the counts of another row.
func (r *row) add(o row) {
	r.lp.add(o.lp)
	r.drag.add(o.drag)
	r.modes.add(o.modes)
	r.tangent.add(o.tangent)
	r.distance.add(o.distance)
	r.distribution.add(o.distribution)
	r.yes, r.no, r.tube, r.pinned = r.yes+o.yes, r.no+o.no, r.tube+o.tube, r.pinned+o.pinned
	r.changing, r.disagree = r.changing+o.changing, r.disagree+o.disagree
}

const columns = "n\tcovered\tlow > truth\thigh < truth\tno value\tnone\tbias ln\t± s.e.\tsharp\tanswered\tspread/bound\twidth/bound\tdrag\tmodes\tbias\ttangent\tbias\tdistance\tbias\tdistribution\tbias\tyes\tno\ttube\tpinned\tchanging\tdisagree"

func (r row) cells() string {
	b, se := r.lp.bias()
	sharp, answered, spread, width := r.lp.sharp()
	mb, _ := r.modes.bias()
	tb, _ := r.tangent.bias()
	db, _ := r.distance.bias()
	cb, _ := r.distribution.bias()
	return fmt.Sprintf("%d\t%.3f\t%d\t%d\t%d\t%d\t%+.3f\t%.3f\t%d\t%.3f\t%.2f\t%.2f\t%.3f\t%.3f\t%+.2f\t%.3f\t%+.2f\t%.3f\t%+.2f\t%.3f\t%+.2f\t%d\t%d\t%d\t%d\t%d\t%d",
		r.lp.n, r.lp.covered(), r.lp.lowMiss, r.lp.highMiss, r.lp.open, r.lp.none, b, se, sharp, answered, spread, width, r.drag.covered(),
		r.modes.covered(), mb, r.tangent.covered(), tb, r.distance.covered(), db, r.distribution.covered(), cb, r.yes, r.no, r.tube, r.pinned, r.changing, r.disagree)
}

// writeConditions prints a row per condition.
func writeConditions(w io.Writer, rows []row) {
	t := tabwriter.NewWriter(w, 0, 0, 2, ' ', tabwriter.AlignRight)
	fmt.Fprintln(t, "drag mPa·s\tL µm\tLp µm\tframes\tinterval s\texposure s\tnoise µm³\tscale\tbend 1/µm\tbound\t"+columns+"\t")
	for _, r := range rows {
		fmt.Fprintf(t, "%.1f\t%.0f\t%.3g\t%d\t%.3g\t%.2g\t%.1e\t%.2f\t%.2f\t%.3f\t%s\t\n", r.dragPaS*1e3, r.lengthUm, r.lpUm, r.frames, r.intervalS, r.exposureS,
			r.noiseUm3, r.noiseScale, r.bendPerUm, r.boundSD, r.cells())
	}
	t.Flush()
}

// writeLevels prints a row per level of every quantity and one for all.
func writeLevels(w io.Writer, rows []row) {
	t := tabwriter.NewWriter(w, 0, 0, 2, ' ', tabwriter.AlignRight)
	fmt.Fprintln(t, "quantity\tlevel\t"+columns+"\t")
	for q, first := range rows[0].level.named() {
		var order []string
		sums := map[string]*row{}
		for _, r := range rows {
			level := r.level.named()[q][1]
			if sums[level] == nil {
				sums[level] = &row{}
				order = append(order, level)
			}
			sums[level].add(r)
		}
		sort.Slice(order, func(i, j int) bool { return less(order[i], order[j]) })
		for _, level := range order {
			fmt.Fprintf(t, "%s\t%s\t%s\t\n", first[0], level, sums[level].cells())
		}
	}
	var all row
	for _, r := range rows {
		all.add(r)
	}
	fmt.Fprintf(t, "all\t\t%s\t\n", all.cells())
	t.Flush()
	fmt.Fprintf(w, "sharp: movies with a Cramér–Rao standard deviation of ln Lp below %g; answered: with a value; spread/bound: rms of the error over it; width/bound: median width over 3.92 times it\n", sharpTo)
}

// less orders levels by their numbers where they start with one.
func less(a, b string) bool {
	var x, y float64
	_, ea := fmt.Sscanf(a, "%g", &x)
	_, eb := fmt.Sscanf(b, "%g", &y)
	if ea == nil && eb == nil {
		return x < y
	}
	return a < b
}
