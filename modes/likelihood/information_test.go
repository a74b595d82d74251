package likelihood

import (
	"math"
	"math/rand/v2"
	"testing"
)

// One mode with everything known but its variance, in independent frames, is known to √(2/(N-1)); here the drag and the noise are unknown too, but in
// frames far apart without exposure the first does not matter, and with hardly any noise neither does the second: M modes, √(2/(M(N-1))).
func TestCramerRaoIndependentFrames(t *testing.T) {
	d := movie(6, 6, 1e-3, 80, 50, 0, 1e-9, 1, rand.New(rand.NewPCG(1, 1)))
	got := CramerRaoSD(d, 6, 1e-3, 40, rand.New(rand.NewPCG(2, 2)))
	want := math.Sqrt(2 / float64(len(d.Tracks)*79))
	// 40 draws of some 800 values know a curvature to 1 %.
	if !(math.Abs(got/want-1) < 0.05) {
		t.Errorf("standard deviation %.4f, want %.4f", got, want)
	}
}

// One mode of N = 300 frames half a relaxation time apart with a tenth of its variance as noise, variance, time and noise unknown: 2.13·√(2/N).
// The factor is ½tr(C⁻¹∂C C⁻¹∂C) of the dense covariance, computed with numpy 1.24:
//
//	i=np.arange(300); C=lambda v,t,r: v*np.exp(-abs(i[:,None]-i)*.5/t)+r*np.eye(300)
//	e=1e-5; D=[(C(1+e,1,.1)-C(1-e,1,.1))/(2*e),(C(1,1+e,.1)-C(1,1-e,.1))/(2*e),(C(1,1,.1+.1*e)-C(1,1,.1-.1*e))/(2*e)]
//	A=[np.linalg.solve(C(1,1,.1),x) for x in D]; F=[[.5*np.trace(a@b) for b in A] for a in A]
//	np.sqrt(np.linalg.inv(F)[0,0]*300/2)   # 2.13
//
// Variance and time are functions of Lp and drag, so that the unknowns are the same three.
func TestCramerRaoCorrelatedFrames(t *testing.T) {
	const n = 300
	k := 1.0
	var d Data
	d.TemperatureK = 1 / (boltzmann * 1e18) // kT = 1 in the units of the model
	tr := Track{WavenumberPerUm: k}
	for i := range n {
		d.TimesS = append(d.TimesS, 0.5*float64(i))
		tr.Amplitude, tr.NoiseVariance = append(tr.Amplitude, 0), append(tr.NoiseVariance, 0.1)
	}
	d.Tracks = []Track{tr}
	got := CramerRaoSD(d, 1, 1, 60, rand.New(rand.NewPCG(3, 3))) / math.Sqrt(2./n)
	if !(math.Abs(got-2.13) < 0.12) {
		t.Errorf("%.3f times the standard deviation of independent frames, want 2.13", got)
	}
}
