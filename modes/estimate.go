package modes

// Estimate is one quantity of a filament by one method, with its 95 % interval. NaN stands
// for what could not be estimated; High may be +Inf. Quantity carries its unit in its name.
type Estimate struct {
	Quantity, Method string
	Value, Low, High float64
	Note             string
}

// Mode is one cosine mode of the tangent angle over all frames of a filament. Amplitudes are
// in µm^½ (rad·√µm), variances in µm (rad²·µm). For a filament in a network it is a normal mode of a rod in a tube instead, numbers −1 and 0 being the shift
// and the turn, with amplitudes in µm^3/2, variances in µm³ and ThermalVariance free of noise and blur.
type Mode struct {
	Mode                                     int
	WavelengthUm                             float64
	MeanAmplitude                            float64
	Variance, NoiseVariance, ThermalVariance float64
	BlurFactor                               float64
	LpUm, LpLowUm, LpHighUm                  float64
	RelaxationS                              float64
	Shapes                                   float64
	Used                                     bool
	Reason                                   string
}

// Separation is one separation of the tangent correlation.
type Separation struct {
	SeparationUm             float64
	CosMean, CosLow, CosHigh float64
	Pairs                    int
	Used                     bool
}

// Result is what one filament's Series says. NaN where a value could not be estimated.
type Result struct {
	Estimates []Estimate
	Modes     []Mode
	Tangent   []Separation
	// LpUm is the recommended persistence length with its interval, LpFrom its method:
	// "likelihood", or "bound" where the data give only a lower bound (LpUm NaN, LpHighUm +Inf).
	LpUm, LpLowUm, LpHighUm float64
	LpFrom                  string
	// Shapes is the effective number of independent shapes of the slowest mode used.
	Shapes float64
	// Thermal is "yes", "no" or "unclear"; Confinement "free", "tube", "pinned" or "unclear".
	Thermal, Confinement string
	// Tube is what the surroundings do; without values in a setting where filaments are free.
	Tube Tube
	// Flags are short stable codes.
	Flags []string
	// TangentFitLpUm and TangentFitIntercept give the fitted line of the tangent
	// correlation, cos = exp(-s/(2·Lp) - intercept), for the figure. NaN if none.
	TangentFitLpUm, TangentFitIntercept float64
}
