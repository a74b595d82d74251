package trace

// Reason is a short stable code for a frame that is not used.
type Reason string

// The reasons. Their sentences for users stand in the table of codes.
const (
	ReasonBorder    Reason = "border"    // the filament touches the border of the image
	ReasonLength    Reason = "length"    // the length jumped away from the filament's own
	ReasonCrossing  Reason = "crossing"  // crosses or touches itself or another filament
	ReasonFaint     Reason = "faint"     // too dim against the noise
	ReasonAmbiguous Reason = "ambiguous" // several candidates are equally near
	ReasonMissing   Reason = "missing"   // not found in this frame
	ReasonFit       Reason = "fit"       // the centreline fit did not converge
	ReasonBranched  Reason = "branched"  // the ridge branches or closes on itself
	ReasonWide      Reason = "wide"      // much wider than a single line
	ReasonSaturated Reason = "saturated" // pixels at the camera's limit
)
