package modes

// Flags of a [Result].
const (
	FlagLowerBound      = "lower_bound"    // only a lower bound of the persistence length
	FlagFewShapes       = "few_shapes"     // few independent shapes, however many frames
	FlagFewFrames       = "few_frames"     // too few usable frames for any estimate
	FlagShort           = "short"          // no or hardly any bending mode is long enough to be resolved
	FlagChanging        = "changing"       // the halves of the movie disagree
	FlagDrag            = "drag"           // the drag is far from that of a filament in water
	FlagDragLimit       = "drag_limit"     // an end of the interval rests on the range allowed for the drag
	FlagEnds            = "ends"           // an end was not seen
	FlagLength          = "length_scatter" // the length scatters more than its errors: contours are mis-traced in places
	FlagNoBlur          = "no_blur_correction"
	FlagNotThermal      = "not_thermal"
	FlagLargeBends      = "large_bends"      // bends beyond which the small-angle dynamics hold less well
	FlagFit             = "fit"              // a fit failed
	FlagConfined        = "confined"         // a tube explains the modes better
	FlagModesDisagree   = "modes_disagree"   // the modes do not tell one persistence length
	FlagNoise           = "noise"            // the noise is far from the predicted
	FlagRolling         = "rolling"          // a bent filament shows mirrored shapes
	FlagMostRejected    = "most_rejected"    // most frames could not be used
	FlagPinned          = "pinned"           // a place along the filament stays where it is
	FlagProcessed       = "processed"        // the images are not as the camera took them
	FlagLpHidden        = "lp_hidden"        // the tube hides the persistence length
	FlagMethodsDisagree = "methods_disagree" // a classic estimate and the likelihood exclude each other
	FlagProjection      = "projection"       // the chamber is too deep for planar theory
)

// Reasons why a [Mode] is not used.
const (
	ReasonNoise      = "noise"       // the noise exceeds the expected signal
	ReasonBlur       = "blur"        // the exposure averages the mode away
	ReasonResolution = "resolution"  // the wavelength is finer than the optics resolve
	ReasonFewShapes  = "few_shapes"  // too few independent shapes
	ReasonLowerBound = "lower_bound" // the variance does not exceed the noise
	ReasonConfined   = "confined"    // a tube holds the mode back
)

// Values of Result.Thermal and Result.Confinement, and of Result.LpFrom.
const (
	ThermalYes         = "yes"
	ThermalNo          = "no"
	ThermalUnclear     = "unclear"
	ConfinementFree    = "free"
	ConfinementTube    = "tube"
	ConfinementPinned  = "pinned"
	ConfinementUnclear = "unclear"
	FromLikelihood     = "likelihood"
	FromBound          = "bound"
)

// Quantities and methods of an [Estimate].
const (
	QuantityLp         = "lp_um"
	QuantityRigidity   = "bending_rigidity_N_m2"
	QuantityDrag       = "drag_Pa_s"
	QuantitySlowest    = "slowest_s"
	QuantityModulus    = "youngs_modulus_Pa"
	QuantityExpected   = "drag_expected_Pa_s"
	MethodTheory       = "theory"
	MethodLikelihood   = "likelihood"
	MethodModes        = "modes"
	MethodTangent      = "tangent"
	MethodDistance     = "distance"
	MethodDistribution = "distribution"
)
