package imaging

// Camera is the noise model of a stack: a pixel that expects m counts has the variance
// ReadVariance + GainCounts*(m-OffsetCounts), in counts².
type Camera struct {
	// GainCounts is counts per photoelectron.
	GainCounts float64
	// OffsetCounts is the level without light, in counts.
	OffsetCounts float64
	// ReadVariance is the variance at the offset, in counts².
	ReadVariance float64
	// Source says where the values came from, in a few words for the report.
	Source string
}

// Variance returns the variance (counts²) of a pixel that expects mean counts, never below
// a twelfth of a count squared (the rounding of the camera's own converter).
func (c Camera) Variance(mean float64) float64 {
	v := c.ReadVariance + c.GainCounts*(mean-c.OffsetCounts)
	if !(v > 1.0/12) {
		return 1.0 / 12
	}
	return v
}
