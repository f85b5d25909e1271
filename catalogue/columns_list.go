package catalogue

func identityColumns() []Column {
	return of("identity", TableSystems,
		textCol("measurement", "Stable id of the measurement; leave empty for a new one.", func(r *Row) *string { return &r.Measurement }).long(64).as(TableMeasurements, "m.measurement"),
		textCol("system", "Short name (slug) of the system the row belongs to; empty = found by system_name.", func(r *Row) *string { return &r.System }).long(80).as(TableSystems, "s.slug"),
		textCol("system_name", "Name of the channel system.", func(r *Row) *string { return &r.SystemName }).long(200).required(),
		textCol("other_names", "Other names in use, separated by semicolons.", func(r *Row) *string { return &r.OtherNames }),
		textCol("parent_deposit", "Fan, drift or other deposit the system is part of: systems of one deposit are not independent.", func(r *Row) *string { return &r.ParentDeposit }).long(200),
		textCol("basin", "Ocean or sedimentary basin.", func(r *Row) *string { return &r.Basin }).long(200),
	)
}

func kindColumns() []Column {
	return of("what it is", TableMeasurements,
		choiceCol("kind", "submarine", "Where the channel was made.", func(r *Row) *string { return &r.Kind },
			"submarine", "river", "lacustrine").as(TableSystems, "s.kind"),
		choiceCol("setting", "unknown", "Physiographic setting of the measured reach.", func(r *Row) *string { return &r.Setting },
			"fan", "slope", "rise", "trench", "foredeep", "minibasin", "deep_ocean", "non_margin", "river_valley", "unknown"),
		choiceCol("margin", "unknown", "Tectonic kind of the margin.", func(r *Row) *string { return &r.Margin },
			"passive", "active", "transform", "intraplate", "unknown").as(TableSystems, "s.margin"),
		choiceCol("burial", "seafloor", "On today's sea floor, buried, or in outcrop.", func(r *Row) *string { return &r.Burial },
			"seafloor", "buried", "outcrop"),
		choiceCol("activity", "unknown", "Whether flows use it today.", func(r *Row) *string { return &r.Activity },
			"active", "relict", "unknown"),
		choiceCol("confinement", "unknown", "What keeps the channel in place.", func(r *Row) *string { return &r.Confinement },
			"confined", "levee_confined", "unconfined", "unknown"),
		choiceCol("aggradation", "unknown", "Whether the channel floor was rising or cutting down.", func(r *Row) *string { return &r.Aggradation },
			"aggrading", "stable", "incising", "unknown"),
		choiceCol("structural_deflection", "unknown", "Whether structures steer the course.", func(r *Row) *string { return &r.StructuralDeflection },
			"yes", "no", "unknown"),
	)
}

func supplyColumns() []Column {
	return of("supply", TableSystems,
		choiceCol("feeder", "unknown", "What fed the system when it was active.", func(r *Row) *string { return &r.Feeder },
			"river", "shelf", "glacial", "volcanic", "failure", "unknown"),
		choiceCol("feeder_geometry", "unknown", "One point, several, or a line source.", func(r *Row) *string { return &r.FeederGeometry },
			"point", "multiple", "linear", "unknown"),
		choiceCol("grain", "unknown", "Dominant grain size class.", func(r *Row) *string { return &r.Grain },
			"mud", "mud_sand", "sand", "gravel", "unknown").as(TableMeasurements, "m.grain"),
		choiceCol("large_river", "unknown", "Whether a large river feeds it, as the source says.", func(r *Row) *string { return &r.LargeRiver },
			"yes", "no", "unknown"),
		lengthCol("catchment_area_km2", "km2", "Area of the river catchment behind it.", func(r *Row) *Number { return &r.CatchmentAreaKm2 }),
		numCol("catchment_latitude_deg", "degrees", "Latitude of the middle of the catchment, north positive.", func(r *Row) *Number { return &r.CatchmentLatitudeDeg }).within(-90, 90),
	)
}

func placeColumns() []Column {
	return of("place", TableMeasurements,
		numCol("latitude_deg", "degrees", "Latitude of the measured reach, WGS84, north positive.", func(r *Row) *Number { return &r.LatitudeDeg }).within(-90, 90).required(),
		numCol("longitude_deg", "degrees", "Longitude of the measured reach, WGS84, east positive.", func(r *Row) *Number { return &r.LongitudeDeg }).within(-180, 360).required(),
		numCol("start_latitude_deg", "degrees", "Latitude of the upstream end of the reach.", func(r *Row) *Number { return &r.StartLatitudeDeg }).within(-90, 90),
		numCol("start_longitude_deg", "degrees", "Longitude of the upstream end of the reach.", func(r *Row) *Number { return &r.StartLongitudeDeg }).within(-180, 360),
		numCol("end_latitude_deg", "degrees", "Latitude of the downstream end of the reach.", func(r *Row) *Number { return &r.EndLatitudeDeg }).within(-90, 90),
		numCol("end_longitude_deg", "degrees", "Longitude of the downstream end of the reach.", func(r *Row) *Number { return &r.EndLongitudeDeg }).within(-180, 360),
		numCol("water_depth_m", "m", "Water depth over the reach, positive down.", func(r *Row) *Number { return &r.WaterDepthM }),
	)
}

func timeColumns() []Column {
	return of("time", TableMeasurements,
		numCol("age_ma", "Ma", "Age of the channel; empty = today's sea floor.", func(r *Row) *Number { return &r.AgeMa }).within(0, 4600),
		numCol("age_min_ma", "Ma", "Youngest age allowed by the data.", func(r *Row) *Number { return &r.AgeMinMa }).within(0, 4600),
		numCol("age_max_ma", "Ma", "Oldest age allowed by the data.", func(r *Row) *Number { return &r.AgeMaxMa }).within(0, 4600),
		textCol("unit", "Chronostratigraphic unit, as Maastrichtian.", func(r *Row) *string { return &r.Unit }).long(100),
		textCol("age_basis", "What the age rests on: biostratigraphy, seismic tie, dating.", func(r *Row) *string { return &r.AgeBasis }),
		numCol("palaeolatitude_deg", "degrees", "Latitude at the time of deposition, north positive.", func(r *Row) *Number { return &r.PalaeolatitudeDeg }).within(-90, 90),
		numCol("palaeolatitude_se_deg", "degrees", "One standard error of the palaeolatitude.", func(r *Row) *Number { return &r.PalaeolatitudeSEDeg }).within(0, 180),
		choiceCol("palaeolatitude_method", "", "How the palaeolatitude was found; empty when there is none.", func(r *Row) *string { return &r.PalaeolatitudeMethod },
			"given", "inclination", "pole", "rotation"),
		textCol("plate", "Plate whose pole or rotation was used.", func(r *Row) *string { return &r.Plate }).long(100),
		textCol("pole_table", "Table of poles or rotations that was used.", func(r *Row) *string { return &r.PoleTable }).long(200),
	)
}

func planformColumns() []Column {
	return of("planform", TableMeasurements,
		textCol("reach", "Name of the measured reach.", func(r *Row) *string { return &r.Reach }).long(200),
		choiceCol("measured_line", "unknown", "Which line was measured: levee crests read straighter than thalwegs.", func(r *Row) *string { return &r.MeasuredLine },
			"thalweg", "centreline", "levee_crest", "unknown").required(),
		choiceCol("valley_line", "unknown", "How the valley length was taken.", func(r *Row) *string { return &r.ValleyLine },
			"end_to_end", "inflections", "axis", "unknown"),
		numCol("sinuosity", "", "Channel length over valley length, 1 or more.", func(r *Row) *Number { return &r.Sinuosity }).within(1, largest).required(),
		choiceCol("sinuosity_kind", "unknown", "Peak, 90th percentile or mean of windows, one bend, or the whole reach.", func(r *Row) *string { return &r.SinuosityKind },
			"peak", "p90", "mean", "bend", "reach", "unknown").required(),
		numCol("sinuosity_se", "", "One standard error of the sinuosity.", func(r *Row) *Number { return &r.SinuositySE }).within(0, largest),
		lengthCol("window_m", "m", "Length of the window the sinuosity was taken in.", func(r *Row) *Number { return &r.WindowM }),
		numCol("windows", "", "Number of windows the value was picked from: a peak grows with it.", func(r *Row) *Number { return &r.Windows }).within(1, 1e9).count(),
		lengthCol("vertex_spacing_m", "m", "Spacing of the vertices of the measured line.", func(r *Row) *Number { return &r.VertexSpacingM }),
		lengthCol("wavelength_m", "m", "Meander wavelength, two bends.", func(r *Row) *Number { return &r.WavelengthM }),
		lengthCol("amplitude_m", "m", "Meander amplitude.", func(r *Row) *Number { return &r.AmplitudeM }),
		lengthCol("radius_m", "m", "Radius of curvature of the bends.", func(r *Row) *Number { return &r.RadiusM }),
		lengthCol("reach_length_m", "m", "Length of the measured reach along the channel.", func(r *Row) *Number { return &r.ReachLengthM }),
	)
}

func slopeColumns() []Column {
	return of("slope and size", TableMeasurements,
		numCol("valley_slope", "m/m", "Slope of the valley floor over the same reach, down positive.", func(r *Row) *Number { return &r.ValleySlope }),
		numCol("valley_slope_se", "m/m", "One standard error of the valley slope.", func(r *Row) *Number { return &r.ValleySlopeSE }).within(0, largest),
		choiceCol("slope_kind", "unknown", "Slope of the valley beside the channel, or of the region.", func(r *Row) *string { return &r.SlopeKind },
			"valley", "regional", "unknown"),
		choiceCol("slope_state", "present", "Slope as it is today, or restored to the time of deposition.", func(r *Row) *string { return &r.SlopeState },
			"present", "restored"),
		numCol("channel_slope", "m/m", "Slope along the channel; not used as a predictor.", func(r *Row) *Number { return &r.ChannelSlope }),
		lengthCol("channel_width_m", "m", "Bankfull width, levee crest to levee crest.", func(r *Row) *Number { return &r.ChannelWidthM }),
		lengthCol("channel_depth_m", "m", "Bankfull depth, levee crest to thalweg.", func(r *Row) *Number { return &r.ChannelDepthM }),
		numCol("levee_left_m", "m", "Height of the left levee above the channel floor, looking downstream.", func(r *Row) *Number { return &r.LeveeLeftM }),
		numCol("levee_right_m", "m", "Height of the right levee above the channel floor, looking downstream.", func(r *Row) *Number { return &r.LeveeRightM }),
	)
}

func depositColumns() []Column {
	return of("deposits", TableMeasurements,
		numCol("net_to_gross", "", "Sand thickness over total thickness, 0 to 1.", func(r *Row) *Number { return &r.NetToGross }).within(0, 1),
		choiceCol("stacking", "unknown", "How channel fills stack.", func(r *Row) *string { return &r.Stacking },
			"vertical", "lateral", "mixed", "unknown"),
		choiceCol("lateral_accretion", "unknown", "Whether lateral accretion packages are seen.", func(r *Row) *string { return &r.LateralAccretion },
			"yes", "no", "unknown"),
	)
}

func surveyColumns() []Column {
	return of("how known", TableMeasurements,
		choiceCol("survey", "unknown", "What the channel was imaged with.", func(r *Row) *string { return &r.Survey },
			"multibeam", "sidescan", "seismic_3d", "seismic_2d", "sub_bottom", "satellite", "dem", "outcrop", "unknown"),
		choiceCol("extraction", "unknown", "What the number was taken from.", func(r *Row) *string { return &r.Extraction },
			"centreline", "grid", "figure", "table", "unknown"),
		lengthCol("pixel_m", "m", "Ground size of a pixel or bin of the image.", func(r *Row) *Number { return &r.PixelM }),
		choiceCol("grade", "quoted", "Remeasured here, surveyed by the source, traced from a figure, or quoted with the method unknown.", func(r *Row) *string { return &r.Grade },
			"remeasured", "surveyed", "traced", "quoted"),
	)
}

func sourceColumns() []Column {
	return of("from where", TableMeasurements,
		textCol("source", "The paper or survey the value comes from.", func(r *Row) *string { return &r.Source }).long(4000).required().as(TableSources, "c.citation"),
		textCol("source_doi", "DOI of the source, as 10.1130/G32295.1.", func(r *Row) *string { return &r.SourceDOI }).long(300).as(TableSources, "c.doi"),
		textCol("source_locator", "Page, figure or table in the source.", func(r *Row) *string { return &r.SourceLocator }),
		textCol("slope_source", "Source of the slope, when it is another paper.", func(r *Row) *string { return &r.SlopeSource }).long(4000),
		textCol("size_source", "Source of width and depth, when it is another paper.", func(r *Row) *string { return &r.SizeSource }).long(4000),
		textCol("contributor", "Credit line of who contributed the row.", func(r *Row) *string { return &r.Contributor }).long(200),
		textCol("licence", "Licence of the contribution, as CC BY 4.0 or CC0.", func(r *Row) *string { return &r.Licence }).long(100),
		textCol("notes", "Anything else.", func(r *Row) *string { return &r.Notes }).long(20000),
	)
}
