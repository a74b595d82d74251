package modes

import "math"

// A thermal movie played backwards is as likely as forwards: for two modes, a(t)·b(t+1) − b(t)·a(t+1) is 0 on average (see Battle et al., Science 352:604
// (2016), for broken detailed balance in the plane of two modes, cited from memory). A rolling shutter breaks it without any motor, so that it may
// only speak against a yes.
const (
	reversalZ      = 4  // standard errors beyond which a movie differs from its reversal
	reversalBlocks = 10 // blocks of frames needed for a standard error
)

// irreversible says whether two of the first three modes circulate about each other. Blocks are three relaxation times of the first mode long.
func (a amplitudes) irreversible(t theory) bool {
	frames := len(a.frames.TimesS)
	if frames < 2*reversalBlocks {
		return false
	}
	span := (a.frames.TimesS[frames-1] - a.frames.TimesS[0]) / float64(frames-1)
	block := max(4, int(3*a.relaxation(a.k[0], t)/span))
	blocks := (frames - 1) / block
	if blocks < reversalBlocks {
		return false
	}
	for n := range min(3, a.fitted) {
		for m := range n {
			x, y := a.b[n], a.b[m]
			mx, my := mean(x), mean(y)
			sum, sum2 := 0.0, 0.0
			for i := range blocks {
				area := 0.0
				for j := i * block; j < (i+1)*block; j++ {
					area += (x[j]-mx)*(y[j+1]-my) - (y[j]-my)*(x[j+1]-mx)
				}
				sum, sum2 = sum+area, sum2+area*area
			}
			if math.Abs(sum) > reversalZ*math.Sqrt(sum2) {
				return true
			}
		}
	}
	return false
}
