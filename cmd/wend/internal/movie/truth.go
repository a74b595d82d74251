package movie

import (
	"wend/modes/chain"
)

// Contour is a true centreline: points (µm) with their arc length from the end at which
// the filament begins in every frame.
type Contour struct{ SUm, XUm, YUm []float64 }

// truthSpacingUm is the distance between points of a true contour.
const truthSpacingUm = 0.1

// Truth returns the contour of each filament in frame t: the average of where each of
// its points was during the exposure, every 0.1 µm.
func (m *Movie) Truth(t int) []Contour {
	contours := make([]Contour, m.Filaments())
	for i := range contours {
		points, s := chain.MeanCurve(m.curves(i, t)).Resample(truthSpacingUm)
		contours[i] = Contour{SUm: s, XUm: points.X, YUm: points.Y}
	}
	return contours
}

// LeavesField tells whether any of c is nearer to the field's edge than two standard
// deviations of the point-spread function, or outside.
func (m *Movie) LeavesField(c Contour) bool {
	return !m.inside(chain.Curve{X: c.XUm, Y: c.YUm}, 2*m.opts.PSFUm)
}

// FilamentTruth is what is true of one filament, for a file beside the movie.
type FilamentTruth struct {
	Filament int     `json:"filament"` // from 1
	LengthUm float64 `json:"length_um"`
	// LpUm and what follows are 0 for a fixed curve.
	LpUm                  float64 `json:"lp_um,omitempty"`
	BendingRigidityNM2    float64 `json:"bending_rigidity_N_m2,omitempty"`
	DragPaS               float64 `json:"drag_Pa_s,omitempty"`
	SlowestS              float64 `json:"slowest_s,omitempty"`
	BendPerUm             float64 `json:"bend_per_um,omitempty"`
	TubeRmsUm             float64 `json:"tube_rms_um,omitempty"`
	TubeStiffnessNPerM2   float64 `json:"tube_stiffness_N_per_m2,omitempty"`
	Modes                 int     `json:"modes,omitempty"`
	SubSteps              int     `json:"sub_steps,omitempty"`
	FramesLeavingTheField int     `json:"frames_leaving_the_field"`
}

// Describe returns what is true of filament i, from 0. FramesLeavingTheField is for the
// caller to count.
func (m *Movie) Describe(i int) FilamentTruth {
	f := FilamentTruth{Filament: i + 1, LengthUm: m.lengthUm(i)}
	if len(m.opts.Fixed) > 0 {
		return f
	}
	c := m.chains[i]
	o := c.Options()
	f.LpUm, f.DragPaS, f.BendPerUm, f.Modes = o.LpUm, o.DragPaS, o.CurvaturePerUm, o.Modes
	f.BendingRigidityNM2 = o.LpUm * 1e-6 * chain.KT(o.TempK)
	f.SlowestS = c.RelaxationS(1)
	f.TubeRmsUm, f.TubeStiffnessNPerM2 = m.opts.TubeRmsUm, o.TubeStiffness
	f.SubSteps = m.tracks[i].SubSteps()
	return f
}
