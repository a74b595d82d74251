package check

import (
	"context"
	"errors"
	"math"
	"sync"

	"gonum.org/v1/gonum/stat/distuv"

	"wend/cmd/wend/internal/job"
	"wend/cmd/wend/internal/movie"
	"wend/imaging"
	"wend/modes"
)

// Estimate is what one synthetic movie gave; NaN where it gave nothing.
type Estimate struct{ LpUm, LowUm, HighUm float64 }

// Outcome is what the synthetic movies of one filament's conditions gave.
type Outcome struct {
	Filament int
	TrueUm   float64
	OfBound  bool
	// Estimates are one a movie, in order.
	Estimates []Estimate
	// Answered movies gave a value, Bounds only a lower bound, Refused nothing; Held is how many intervals, bounds included, hold the truth.
	Movies, Answered, Bounds, Refused, Held int
	HeldLow, HeldHigh                       float64 // 95 % interval of the share held
	// Bias is the mean of ln(measured/true) with its standard error, Scatter its standard deviation, Predicted the median of what the intervals say it is.
	Bias, BiasSE, Scatter, Predicted float64
	// SmallestRatio of two persistence lengths that one such filament against another shows with a power of 80 % at 5 %.
	SmallestRatio                   float64
	ThermalYes, ThermalNo, Confined int
	FramesUsed                      float64 // share
}

// Run makes and measures the movies, several at a time. done, if not nil, is called after each. The error is ctx's when it ends.
func Run(ctx context.Context, filament int, c Conditions, movies int, seed uint64, workers int, done func()) (Outcome, error) {
	out := Outcome{Filament: filament, TrueUm: c.TrueLpUm, OfBound: c.OfBound, Movies: movies}
	results := make([]*job.Filament, movies)
	errs := make([]error, movies)
	var wait sync.WaitGroup
	var tell sync.Mutex
	slots := make(chan struct{}, max(1, workers))
	for i := range movies {
		slots <- struct{}{}
		wait.Go(func() {
			defer func() { <-slots }()
			if errs[i] = ctx.Err(); errs[i] != nil {
				return
			}
			results[i], errs[i] = one(ctx, c, seed+uint64(i))
			if done != nil && errs[i] == nil {
				tell.Lock()
				defer tell.Unlock()
				done()
			}
		})
	}
	wait.Wait()
	if err := errors.Join(errs...); err != nil {
		return out, err
	}
	out.count(results)
	return out, nil
}

// one makes and measures a movie; nil where no filament was found.
func one(ctx context.Context, c Conditions, seed uint64) (*job.Filament, error) {
	o := c.Movie
	o.Seed = seed
	m, err := movie.New(o)
	if err != nil {
		return nil, err
	}
	r, err := job.Measure(ctx, m, imaging.Info{MaxCount: 65535, SizeC: 1}, c.Settings, 1, nil)
	if err != nil {
		return nil, err
	}
	var best *job.Filament
	for i := range r.Filaments {
		if f := &r.Filaments[i]; best == nil || f.FramesUsed > best.FramesUsed {
			best = f
		}
	}
	return best, nil
}

// count fills the figures from the movies' filaments.
func (o *Outcome) count(results []*job.Filament) {
	nan := math.NaN()
	var errors, widths []float64
	for _, f := range results {
		e := Estimate{nan, nan, nan}
		if f != nil {
			e = Estimate{f.LpUm, f.LpLowUm, f.LpHighUm}
			o.FramesUsed += float64(f.FramesUsed) / float64(max(1, len(f.Contours))) / float64(o.Movies)
			switch f.Thermal {
			case modes.ThermalYes:
				o.ThermalYes++
			case modes.ThermalNo:
				o.ThermalNo++
			}
			if f.Confinement == modes.ConfinementTube || f.Confinement == modes.ConfinementPinned {
				o.Confined++
			}
		}
		o.Estimates = append(o.Estimates, e)
		switch {
		case e.LpUm > 0:
			o.Answered++
			errors = append(errors, math.Log(e.LpUm/o.TrueUm))
			widths = append(widths, math.Log(e.HighUm/e.LowUm)/(2*1.959964))
		case e.LowUm > 0:
			o.Bounds++
		default:
			o.Refused++
		}
		if e.LowUm <= o.TrueUm && o.TrueUm <= e.HighUm {
			o.Held++
		}
	}
	o.HeldLow, o.HeldHigh = binomial(o.Held, o.Answered+o.Bounds)
	o.Bias, o.BiasSE, o.Scatter, o.Predicted, o.SmallestRatio = nan, nan, nan, nan, nan
	if n := float64(len(errors)); n >= 2 {
		o.Bias = 0
		for _, e := range errors {
			o.Bias += e / n
		}
		v := 0.0
		for _, e := range errors {
			v += (e - o.Bias) * (e - o.Bias) / (n - 1)
		}
		o.Scatter, o.BiasSE, o.Predicted = math.Sqrt(v), math.Sqrt(v/n), median(widths)
		// (z of 97.5 % + z of 80 %) standard deviations of a difference of two.
		o.SmallestRatio = math.Exp((1.959964 + 0.841621) * math.Sqrt2 * o.Scatter)
	}
}

// binomial is the exact 95 % interval of a share, k of n (Clopper and Pearson, Biometrika 26:404 (1934), cited from memory).
func binomial(k, n int) (low, high float64) {
	if n == 0 {
		return math.NaN(), math.NaN()
	}
	low, high = 0, 1
	if k > 0 {
		low = distuv.Beta{Alpha: float64(k), Beta: float64(n - k + 1)}.Quantile(0.025)
	}
	if k < n {
		high = distuv.Beta{Alpha: float64(k + 1), Beta: float64(n - k)}.Quantile(0.975)
	}
	return low, high
}
