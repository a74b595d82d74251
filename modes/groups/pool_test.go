package groups

import (
	"math"
	"math/rand/v2"
	"testing"
)

// value is a member with a normal likelihood of the logarithm.
func value(preparation string, y, sd float64) Member {
	return NewMember(preparation, math.Exp(y), math.Exp(y-z95*sd), math.Exp(y+z95*sd))
}

// Random effects of five studies: restricted maximum likelihood of the spread, the mean and its two standard errors. Values from scipy 1.10.1:
//
//	import numpy as np; from scipy.optimize import minimize_scalar
//	y=np.array([2.80,2.95,2.70,3.05,2.88]); s=np.array([.05,.08,.06,.10,.07])
//	def reml(t): w=1/(s*s+t); m=(w*y).sum()/w.sum(); return .5*(np.log(s*s+t).sum()+np.log(w.sum())+(w*(y-m)**2).sum())
//	t=minimize_scalar(reml,bounds=(0,1),method='bounded',options=dict(xatol=1e-12)).x; w=1/(s*s+t); m=(w*y).sum()/w.sum()
//	print(t, m, w.sum()**-.5, ((w*(y-m)**2).sum()/4/w.sum())**.5)   # 0.0112184 2.8604327 0.0571375 0.0583801
func TestPoolRandomEffects(t *testing.T) {
	var members []Member
	for i, y := range []float64{2.80, 2.95, 2.70, 3.05, 2.88} {
		members = append(members, value("", y, []float64{.05, .08, .06, .10, .07}[i]))
	}
	p := Pool(members)
	const tt = 2.7764451 // 97.5 % of t with 4 degrees of freedom, scipy.stats.t.ppf
	se := math.Log(p.High/p.Low) / (2 * tt)
	for _, c := range []struct {
		name           string
		got, want, tol float64
	}{
		{"spread²", p.SpreadFilaments * p.SpreadFilaments, 0.0112184, 2e-4}, {"mean", math.Log(p.Mean), 2.8604327, 1e-4}, {"standard error", se, 0.0583801, 4e-4},
	} {
		if !(math.Abs(c.got-c.want) < c.tol) {
			t.Errorf("%s %.6f, want %.6f", c.name, c.got, c.want)
		}
	}
	if p.Filaments != 5 || p.Preparations != 0 || !math.IsNaN(p.SpreadPreparations) {
		t.Errorf("%+v", p)
	}
}

// The result does not depend on the order, nor does it change with refusals, which are counted; a bound far below the others changes nothing, one far above pulls the mean up.
func TestPoolCounts(t *testing.T) {
	members := []Member{value("a", 2.8, 0.1), value("a", 2.6, 0.1), value("b", 2.9, 0.15), value("b", 3.0, 0.1), value("c", 2.7, 0.1)}
	p := Pool(members)
	nan := math.NaN()
	more := append([]Member{NewMember("c", nan, nan, nan), NewMember("b", nan, 1, math.Inf(1))}, members[4], members[2], members[0], members[1], members[3])
	q := Pool(more)
	if q.Excluded != 1 || q.LowerBounds != 1 || q.Filaments != 5 || q.Preparations != 3 || !(math.Abs(math.Log(q.Mean/p.Mean)) < 2e-3) {
		t.Errorf("%+v and %+v", p, q)
	}
	up := Pool(append(more, NewMember("a", nan, 60, math.Inf(1))))
	if !(up.Mean > 1.03*p.Mean) {
		t.Errorf("a bound of 60 moves the mean from %.2f to %.2f", p.Mean, up.Mean)
	}
	if only := Pool([]Member{NewMember("", nan, 5, math.Inf(1))}); !math.IsNaN(only.Mean) || only.LowerBounds != 1 {
		t.Errorf("a bound alone: %+v", only)
	}
	if one := Pool(members[:1]); !(math.Abs(one.Mean/members[0].Value-1) < 2e-3) || !math.IsNaN(one.Low) {
		t.Errorf("one filament: %+v", one)
	}
}

// Coverage: intervals of the mean hold it in 19 of 20 studies or more, few preparations and many, with bounds among the members;
func TestPoolCoverage(t *testing.T) {
	if testing.Short() {
		t.Skip("many movies")
	}
	for _, tc := range []struct {
		name                      string
		preparations, filaments   int
		betweenPreps, betweenFils float64
		labels, bounds            bool
	}{
		{"one kind", 1, 8, 0, 0.15, false, false}, {"three preparations", 3, 5, 0.15, 0.15, true, false}, {"six, hardly apart", 6, 4, 0.03, 0.1, true, false},
		{"five, with bounds", 5, 4, 0.1, 0.15, true, true},
	} {
		t.Run(tc.name, func(t *testing.T) {
			t.Parallel()
			const studies = 30
			held, bias := 0, 0.0
			rng := rand.New(rand.NewPCG(1, 1))
			for range studies {
				var members []Member
				for j := range tc.preparations {
					shift := tc.betweenPreps * rng.NormFloat64()
					for range tc.filaments {
						sd := 0.06 + 0.2*rng.Float64()
						y := 2.7 + shift + tc.betweenFils*rng.NormFloat64() + sd*rng.NormFloat64()
						m := value("", y, sd)
						if tc.bounds && rng.Float64() < 0.15 {
							m = NewMember("", math.NaN(), math.Exp(y-z95*boundSD), math.Inf(1))
						}
						if tc.labels {
							m.Preparation = string(rune('a' + j))
						}
						members = append(members, m)
					}
				}
				p := Pool(members)
				if p.Low <= math.Exp(2.7) && math.Exp(2.7) <= p.High {
					held++
				}
				bias += (math.Log(p.Mean) - 2.7) / studies
			}
			t.Logf("%d of %d, bias %+.3f", held, studies, bias)
			// 30 of 95 %: below 25 has probability 0.003; above is no harm here.
			if held < 25 || math.Abs(bias) > 0.08 {
				t.Errorf("%d of %d intervals hold the mean, bias %.3f", held, studies, bias)
			}
		})
	}
}
