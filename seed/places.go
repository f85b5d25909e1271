package seed

// deposit is one invented parent deposit: where it lies and what its systems
// have in common. Its places are real water; its names, and everything said
// about it, are invented.
type deposit struct {
	name    string // "" = its system stands alone
	basin   string
	lat     float64 // degrees, middle of its systems
	lon     float64
	bearing float64 // degrees clockwise from north, down-system
	setting string
	margin  string
	feeder  string
	points  string  // feeder geometry
	grain   string  // of most reaches
	large   string  // large river
	width   float64 // m, typical
	slope   float64 // m/m, typical
	depth   float64 // m of water at the head
	river   *catchment
	old     *deposition // nil = on today's sea floor
	sources [2]int      // indices into sources: the first maps most of it
	systems []system
}

type catchment struct{ lat, area float64 } // degrees, km2

// deposition is when and where an ancient deposit formed.
type deposition struct {
	age, youngest, oldest float64 // Ma
	unit                  string
	basis                 string
	lat, se               float64 // palaeolatitude and its standard error, degrees
	method                string
	slopeState            string
}

// system names a channel and how it was measured.
type system struct {
	name    string
	pattern pattern
	other   string // other names
}

// pattern is how much effort a system saw.
type pattern int

const (
	single   pattern = iota // one row
	peakMean                // peak and mean of one reach by one source
	reaches                 // three reaches by one source
	quoted                  // one row, and one quoted in a census with the method unknown
	crest                   // one row, and an older one along the levee crests
	bends                   // one reach and four of its bends
	trunk                   // three reaches, a census and an older crest row
	best                    // the well measured one: thirty reaches, and a census
)

const (
	basinSunder  = "Corvanthine Basin"
	basinHespel  = "Hespelune Abyssal Plain"
	basinEllim   = "Ellimarque Basin"
	basinIdrune  = "Idrunelle Abyssal Plain"
	basinPolwar  = "Polwarrine Basin"
	basinSescar  = "Sescarumbe Basin"
	basinTolmun  = "Tolmundine Deep"
	basinVarnol  = "Varnolette Basin"
	basinOskelun = "Oskelunde Basin"
)

var deposits = []deposit{
	{name: "Orquathe Fan", basin: basinSunder, lat: 2.4, lon: -12, bearing: 205, setting: "fan", margin: "passive", feeder: "river", points: "point", grain: "mud", large: "yes", width: 700, slope: 0.0031, depth: 2900, river: &catchment{8.1, 640000}, sources: [2]int{9, 0}, systems: []system{
		{"Orquathe Main Channel", best, "Orquathe Trunk; Sumbraske West"}, {"Orquathe East Channel", peakMean, ""}, {"Pelinthe Channel", reaches, ""}, {"Sumbraske Channel", single, ""}, {"Okelluin Channel", single, ""}}},
	{name: "Tamberil Fan", basin: basinIdrune, lat: -29.5, lon: 36.5, bearing: 130, setting: "fan", margin: "passive", feeder: "river", points: "multiple", grain: "mud_sand", large: "no", width: 1200, slope: 0.0042, depth: 2300, river: &catchment{-27.5, 92000}, sources: [2]int{0, 2}, systems: []system{
		{"Tamberil North Channel", reaches, ""}, {"Tamberil South Channel", single, ""}, {"Quessandrel Channel", peakMean, ""}, {"Drusmirane Channel", single, ""}}},
	{name: "Vessaline Apron", basin: basinOskelun, lat: 68.8, lon: 2, bearing: 290, setting: "slope", margin: "passive", feeder: "glacial", points: "linear", grain: "mud_sand", large: "no", width: 600, slope: 0.0095, depth: 1700, sources: [2]int{3, 8}, systems: []system{
		{"Vessaline A", single, ""}, {"Vessaline B", single, ""}, {"Torquevald Channel", quoted, ""}}},
	{name: "Ysolmarrow Fan", basin: basinIdrune, lat: 4.8, lon: 75.8, bearing: 205, setting: "fan", margin: "passive", feeder: "river", points: "point", grain: "mud", large: "yes", width: 1500, slope: 0.0024, depth: 2600, river: &catchment{12.2, 310000}, sources: [2]int{0, 11}, systems: []system{
		{"Ysolmarrow Trunk Channel", trunk, "Ysolmarrow 1"}, {"Ysolmarrow Distributary 2", single, ""}, {"Merrukai Channel", peakMean, ""}, {"Ashivorane Channel", single, ""}}},
	{name: "Kaverunoa Fan", basin: basinVarnol, lat: -33.5, lon: 156, bearing: 95, setting: "fan", margin: "passive", feeder: "shelf", points: "multiple", grain: "sand", large: "no", width: 420, slope: 0.0085, depth: 3100, sources: [2]int{8, 1}, systems: []system{
		{"Kaverunoa Channel", peakMean, ""}, {"Tuimoraque Channel", single, ""}}},
	{name: "Brenvossel Fan", basin: basinOskelun, lat: 74.5, lon: 5.5, bearing: 270, setting: "slope", margin: "passive", feeder: "glacial", points: "linear", grain: "gravel", large: "no", width: 350, slope: 0.013, depth: 1900, sources: [2]int{1, 3}, systems: []system{
		{"Brenvossel North Channel", single, ""}, {"Brenvossel South Channel", single, ""}}},
	{name: "Dulquarra Fan", basin: basinIdrune, lat: -6.5, lon: 43.8, bearing: 80, setting: "fan", margin: "passive", feeder: "river", points: "point", grain: "mud", large: "no", width: 1000, slope: 0.0052, depth: 2500, river: &catchment{-8.4, 178000}, sources: [2]int{1, 5}, systems: []system{
		{"Dulquarra Channel", reaches, ""}, {"Mzambeluke Channel", single, ""}, {"Kirumbassel Channel", single, ""}}},
	{name: "Ettinmoor Rise", basin: basinHespel, lat: 49, lon: -40.5, bearing: 120, setting: "rise", margin: "passive", feeder: "glacial", points: "multiple", grain: "mud_sand", large: "no", width: 900, slope: 0.0041, depth: 3300, sources: [2]int{1, 2}, systems: []system{
		{"Ettinmoor Channel", crest, ""}, {"Wexcombrel Channel", single, ""}, {"Harnoquish Channel", single, ""}}},
	{name: "Fenquarrel Slope", basin: basinEllim, lat: 40.3, lon: 6.2, bearing: 160, setting: "slope", margin: "active", feeder: "shelf", points: "multiple", grain: "sand", large: "no", width: 300, slope: 0.015, depth: 1500, sources: [2]int{7, 1}, systems: []system{
		{"Fenquarrel Channel", bends, ""}, {"Saltravine Channel", single, ""}}},
	{basin: basinHespel, lat: 57.8, lon: -33, bearing: 210, setting: "deep_ocean", margin: "unknown", feeder: "glacial", points: "multiple", grain: "mud", large: "no", width: 2100, slope: 0.0014, depth: 2700, sources: [2]int{0, 3}, systems: []system{
		{"Gwendrasse Deep-Sea Channel", trunk, ""}}},
	{name: "Halvoquin Fan", basin: basinSescar, lat: -24.5, lon: 8.5, bearing: 255, setting: "fan", margin: "passive", feeder: "shelf", points: "linear", grain: "mud_sand", large: "no", width: 700, slope: 0.0061, depth: 3000, sources: [2]int{11, 1}, systems: []system{
		{"Halvoquin Channel", peakMean, ""}, {"Namquethe Channel", single, ""}}},
	{name: "Ixtamere Trench Wedge", basin: "Ixtamere Trench", lat: -14, lon: -78.8, bearing: 318, setting: "trench", margin: "active", feeder: "river", points: "multiple", grain: "sand", large: "no", width: 520, slope: 0.0072, depth: 5200, river: &catchment{-13.8, 21000}, sources: [2]int{2, 8}, systems: []system{
		{"Ixtamere Axial Channel", reaches, ""}, {"Chuquivelle Channel", single, ""}}},
	{name: "Jorvendell Fan", basin: basinPolwar, lat: -62.5, lon: 88, bearing: 350, setting: "fan", margin: "passive", feeder: "glacial", points: "linear", grain: "mud_sand", large: "no", width: 800, slope: 0.0079, depth: 2800, sources: [2]int{8, 5}, systems: []system{
		{"Jorvendell West Channel", single, ""}, {"Jorvendell East Channel", peakMean, ""}}},
	{name: "Kittarune Minibasins", basin: basinTolmun, lat: 12.4, lon: 112.8, bearing: 110, setting: "minibasin", margin: "passive", feeder: "river", points: "multiple", grain: "mud_sand", large: "unknown", width: 340, slope: 0.0088, depth: 1600, river: &catchment{14.9, 55000}, sources: [2]int{7, 0}, systems: []system{
		{"Kittarune M1", single, ""}, {"Kittarune M2", bends, ""}, {"Kittarune M3", peakMean, ""}, {"Kittarune M4", single, ""}, {"Kittarune M5", single, ""}}},
	{name: "Lurandisk Fan", basin: "Lurandine Abyssal Plain", lat: 43.5, lon: -133, bearing: 245, setting: "fan", margin: "active", feeder: "river", points: "point", grain: "mud_sand", large: "no", width: 1100, slope: 0.0038, depth: 3000, river: &catchment{44.6, 130000}, sources: [2]int{0, 3}, systems: []system{
		{"Lurandisk Channel", reaches, ""}, {"Oquelsbane Channel", single, ""}, {"Tellaqune Channel", crest, "Tellaqune Valley"}}},
	{name: "Mossovane Apron", basin: basinVarnol, lat: -26.5, lon: 179.9, bearing: 275, setting: "slope", margin: "active", feeder: "volcanic", points: "multiple", grain: "sand", large: "no", width: 260, slope: 0.019, depth: 1400, sources: [2]int{1, 8}, systems: []system{
		{"Mossovane West Channel", single, ""}, {"Mossovane East Channel", single, ""}}},
	{name: "Nembrusca Fan", basin: basinSescar, lat: -34.6, lon: -47, bearing: 130, setting: "fan", margin: "passive", feeder: "river", points: "point", grain: "mud", large: "yes", width: 1600, slope: 0.003, depth: 3200, river: &catchment{-26.2, 890000}, sources: [2]int{0, 5}, systems: []system{
		{"Nembrusca Channel", trunk, ""}, {"Itaquessand Channel", single, ""}, {"Jurumbelle Channel", peakMean, ""}}},
	{name: "Ozzarelle Rise", basin: basinHespel, lat: 33, lon: -69, bearing: 130, setting: "rise", margin: "passive", feeder: "shelf", points: "multiple", grain: "mud", large: "no", width: 900, slope: 0.0043, depth: 3400, sources: [2]int{3, 11}, systems: []system{
		{"Ozzarelle Channel", peakMean, ""}, {"Penquabeth Channel", single, ""}}},
	{basin: basinIdrune, lat: 15, lon: 58.5, bearing: 110, setting: "slope", margin: "transform", feeder: "shelf", points: "point", grain: "mud_sand", large: "no", width: 600, slope: 0.0055, depth: 2400, sources: [2]int{7, 7}, systems: []system{
		{"Prathuline Channel", bends, ""}}},
	{name: "Quorrimay Trough", basin: basinTolmun, lat: 3.4, lon: 122.4, bearing: 85, setting: "foredeep", margin: "active", feeder: "river", points: "point", grain: "mud", large: "no", width: 700, slope: 0.0066, depth: 3900, river: &catchment{4.9, 12000}, sources: [2]int{8, 2}, systems: []system{
		{"Quorrimay Channel", peakMean, ""}, {"Bulangassar Channel", single, ""}}},
	{name: "Rusquendal Fan", basin: "Rusquendal Deep", lat: 51.5, lon: -152, bearing: 250, setting: "trench", margin: "active", feeder: "glacial", points: "multiple", grain: "sand", large: "no", width: 700, slope: 0.0058, depth: 4300, sources: [2]int{2, 1}, systems: []system{
		{"Rusquendal Channel", quoted, ""}, {"Unalvosque Channel", single, ""}}},
	{name: "Sithramoor Fan", basin: basinSescar, lat: -46.5, lon: -57.5, bearing: 110, setting: "slope", margin: "passive", feeder: "shelf", points: "multiple", grain: "sand", large: "no", width: 600, slope: 0.011, depth: 2600, sources: [2]int{1, 5}, systems: []system{
		{"Sithramoor Channel", peakMean, ""}, {"Calaventrue Channel", single, ""}}},
	{basin: basinHespel, lat: 24, lon: -20.5, bearing: 285, setting: "slope", margin: "passive", feeder: "failure", points: "linear", grain: "sand", large: "no", width: 450, slope: 0.0071, depth: 2800, sources: [2]int{3, 3}, systems: []system{
		{"Thurlequin Channel", single, ""}}},
	{name: "Umbravasse Fan", basin: "Umbravasse Deep", lat: 76.5, lon: -142, bearing: 320, setting: "fan", margin: "passive", feeder: "glacial", points: "point", grain: "mud", large: "no", width: 900, slope: 0.0034, depth: 2900, sources: [2]int{2, 11}, systems: []system{
		{"Umbravasse West Channel", single, ""}, {"Umbravasse East Channel", single, ""}}},

	{name: "Veldramine Complex", basin: "Veldramine Shelf", lat: 73.6, lon: 31, bearing: 215, setting: "slope", margin: "passive", feeder: "river", points: "point", grain: "mud_sand", large: "no", width: 480, slope: 0.0062, depth: 310, old: &deposition{214, 206, 222, "Norian", "biostratigraphy", 47, 4.2, "rotation", "restored"}, sources: [2]int{4, 4}, systems: []system{
		{"Veldramine Channel", single, ""}}},
	{name: "Wexoril Sandstone", basin: basinSunder, lat: 1.6, lon: 6.6, bearing: 220, setting: "slope", margin: "passive", feeder: "river", points: "point", grain: "mud_sand", large: "yes", width: 420, slope: 0.0071, depth: 2100, old: &deposition{14.6, 13.8, 15.9, "Langhian", "biostratigraphy", -0.9, 1.2, "pole", "present"}, sources: [2]int{12, 4}, systems: []system{
		{"Wexoril Upper Channel", peakMean, ""}, {"Wexoril Middle Channel", single, ""}, {"Wexoril Lower Channel", single, ""}}},
	{name: "Xanthuvel Complex", basin: basinSescar, lat: -23.8, lon: -39.6, bearing: 120, setting: "fan", margin: "passive", feeder: "shelf", points: "multiple", grain: "sand", large: "no", width: 560, slope: 0.0083, depth: 2300, old: &deposition{69, 66, 72.2, "Maastrichtian", "seismic tie to a dated well", -29.5, 3.1, "pole", "restored"}, sources: [2]int{12, 4}, systems: []system{
		{"Xanthuvel Channel", quoted, ""}, {"Sarquembe Channel", single, ""}}},
	{name: "Yltrevane Complex", basin: "Yltrevane Graben", lat: 61.9, lon: 0.4, bearing: 75, setting: "fan", margin: "passive", feeder: "shelf", points: "multiple", grain: "sand", large: "no", width: 380, slope: 0.0094, depth: 180, old: &deposition{57.6, 56, 59.2, "Thanetian", "biostratigraphy", 53.5, 2.4, "inclination", "present"}, sources: [2]int{4, 12}, systems: []system{
		{"Yltrevane Channel", peakMean, ""}, {"Brannoquill Channel", single, ""}}},
	{name: "Zephirost Sandstone", basin: "Zephirost Plateau", lat: -17.6, lon: 116.5, bearing: 300, setting: "slope", margin: "passive", feeder: "river", points: "point", grain: "mud_sand", large: "no", width: 520, slope: 0.0068, depth: 1300, old: &deposition{158, 154.8, 161.5, "Oxfordian", "biostratigraphy", -38, 4.8, "pole", "restored"}, sources: [2]int{12, 12}, systems: []system{
		{"Zephirost Channel", single, ""}}},
	{name: "Azzumeril Complex", basin: "Azzumeril Trough", lat: 55.6, lon: 3.9, bearing: 20, setting: "fan", margin: "unknown", feeder: "river", points: "point", grain: "mud_sand", large: "no", width: 450, slope: 0.0057, depth: 45, old: &deposition{279, 274.4, 283.3, "Kungurian", "seismic tie to a dated well", 9, 6.5, "inclination", "restored"}, sources: [2]int{4, 4}, systems: []system{
		{"Azzumeril Channel", single, ""}}},
}

// riverPlace is one river of the control group.
type riverPlace struct {
	name          string
	basin         string
	lat, lon      float64
	bearing       float64
	width, slope  float64 // m, m/m
	grain, margin string
	pattern       pattern
}

var rivers = []riverPlace{
	{"Quennambole River", "Quennambole Lowland", -2.5, 22, 270, 380, 0.00022, "mud", "passive", peakMean},
	{"Vostalquin River", "Vostalquin Plain", 62, 95, 320, 420, 0.00031, "mud_sand", "unknown", single},
	{"Arroyavelle River", "Arroyavelle Plain", -28.4, -60.2, 170, 260, 0.00027, "mud_sand", "passive", single},
	{"Pendrismore River", "Pendrismore Plain", 53.4, -109.6, 85, 140, 0.00072, "sand", "unknown", peakMean},
	{"Lissuvanne River", "Lissuvanne Plain", 24.1, 79.2, 110, 210, 0.00065, "sand", "unknown", single},
	{"Okandresse River", "Okandresse Steppe", 48.2, 60.4, 250, 120, 0.00038, "mud_sand", "unknown", single},
	{"Tarquimbole River", "Tarquimbole Upland", -14.2, 26.1, 160, 150, 0.0006, "sand", "unknown", single},
	{"Wirrabunquel River", "Wirrabunquel Plain", -27, 143, 225, 90, 0.00024, "mud", "unknown", single},
	{"Yazoquelle River", "Yazoquelle Plain", 36.8, -97.4, 120, 170, 0.0005, "sand", "passive", single},
	{"Karvequane River", "Karvequane Upland", 65.5, 27.5, 210, 100, 0.0011, "gravel", "unknown", single},
	{"Moruvelle River", "Moruvelle Lowland", 7.4, -67.2, 60, 310, 0.00021, "mud", "passive", single},
	{"Zhelvandrine River", "Zhelvandrine Plain", 50.2, 32.3, 165, 130, 0.00029, "mud_sand", "unknown", single},
}
