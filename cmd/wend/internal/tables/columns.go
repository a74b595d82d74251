package tables

// The columns of every table, in order. A new one goes at the end: readers go by name.
var (
	filamentColumns = []string{"filament", "first_frame", "last_frame", "frames_used", "frames_rejected", "length_um", "length_sd_um",
		"end_0", "end_1", "snr", "photons_per_um", "background_per_um2", "psf_nm", "localisation_nm", "shapes", "thermal", "confinement",
		"lp_um", "lp_low_um", "lp_high_um", "lp_from", "tube_rms_um", "tube_rms_low_um", "tube_rms_high_um",
		"mesh_um", "mesh_low_um", "mesh_high_um", "mesh_from", "flags"}
	estimateColumns = []string{"filament", "quantity", "method", "value", "low", "high", "note"}
	// The last six of frames.csv let the analysis run again from the saved contours alone.
	frameColumns = []string{"filament", "frame", "time_s", "used", "reason", "length_um", "end_to_end_um", "x_um", "y_um", "snr",
		"photons_per_um", "width_nm", "se_nm", "noise_um3",
		"length_se_um", "background_per_um2", "end_0", "end_1", "end_0_se_um", "end_1_se_um"}
	contourColumns = []string{"filament", "frame", "point", "s_um", "x_um", "y_um", "se_nm"}
	modeColumns    = []string{"filament", "mode", "wavelength_um", "mean_amplitude", "variance", "noise_variance", "blur_factor",
		"thermal_variance", "lp_um", "lp_low_um", "lp_high_um", "relaxation_s", "shapes", "used", "reason"}
	tangentColumns = []string{"filament", "separation_um", "cos_mean", "cos_low", "cos_high", "pairs", "used"}
	tubeColumns    = []string{"filament", "s_um", "rms_um", "rms_low_um", "rms_high_um", "noise_um"}
	lagColumns     = []string{"filament", "lag_s", "transverse_msd_um2", "longitudinal_msd_um2", "pairs"}
)

// The names of the files.
const (
	FilamentsFile = "filaments.csv"
	EstimatesFile = "estimates.csv"
	FramesFile    = "frames.csv"
	ContoursFile  = "contours.csv"
	ModesFile     = "modes.csv"
	TangentFile   = "tangent.csv"
	TubeFile      = "tube.csv"
	LagsFile      = "lags.csv"
	SummaryFile   = "summary.json"
)
