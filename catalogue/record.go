// Package catalogue keeps the records: systems, measurements, sources,
// centrelines, revisions, review and accounts, in one SQLite file. All SQL of
// the project is here. It imports neither server, views nor echo.
package catalogue

import "database/sql"

// Number is an optional number: V with Valid false is "not given". Units are
// those of the column that holds it.
type Number = sql.Null[float64]

// Num returns a given number.
func Num(v float64) Number { return Number{V: v, Valid: true} }

// Row is one measurement together with the system it belongs to and its
// source: one line of the measurement table, with a field for every column of
// Columns. Text fields hold "" when nothing was given; choice fields always
// hold one of the column's choices (palaeolatitude_method only where there is a
// palaeolatitude). On the way in a blank choice means "not said": it takes the
// value of a known system, or the default of the column.
type Row struct {
	// Identity.
	Measurement   string // stable id, "m000123"
	System        string // slug
	SystemName    string
	OtherNames    string
	ParentDeposit string
	Basin         string

	// What it is.
	Kind                 string
	Setting              string
	Margin               string
	Burial               string
	Activity             string
	Confinement          string
	Aggradation          string
	StructuralDeflection string

	// Supply.
	Feeder               string
	FeederGeometry       string
	Grain                string
	LargeRiver           string
	CatchmentAreaKm2     Number // km2
	CatchmentLatitudeDeg Number // degrees

	// Place, WGS84 degrees, north and east positive.
	LatitudeDeg       Number
	LongitudeDeg      Number
	StartLatitudeDeg  Number
	StartLongitudeDeg Number
	EndLatitudeDeg    Number
	EndLongitudeDeg   Number
	WaterDepthM       Number // m

	// Time.
	AgeMa                Number // Ma; not given = today's sea floor
	AgeMinMa             Number
	AgeMaxMa             Number
	Unit                 string // chronostratigraphic unit
	AgeBasis             string
	PalaeolatitudeDeg    Number
	PalaeolatitudeSEDeg  Number // one standard error, degrees
	PalaeolatitudeMethod string
	Plate                string
	PoleTable            string

	// Planform.
	Reach          string
	MeasuredLine   string
	ValleyLine     string
	Sinuosity      Number // >= 1
	SinuosityKind  string
	SinuositySE    Number
	WindowM        Number // m
	Windows        Number // count
	VertexSpacingM Number // m
	WavelengthM    Number // m
	AmplitudeM     Number // m
	RadiusM        Number // m
	ReachLengthM   Number // m

	// Slope and size.
	ValleySlope   Number // m/m
	ValleySlopeSE Number // m/m
	SlopeKind     string
	SlopeState    string
	ChannelSlope  Number // m/m
	ChannelWidthM Number // m
	ChannelDepthM Number // m
	LeveeLeftM    Number // m above the channel floor, looking downstream
	LeveeRightM   Number // m above the channel floor, looking downstream

	// Deposits.
	NetToGross       Number // 0..1
	Stacking         string
	LateralAccretion string

	// How known.
	Survey     string
	Extraction string
	PixelM     Number // m
	Grade      string

	// From where.
	Source        string
	SourceDOI     string
	SourceLocator string
	SlopeSource   string
	SizeSource    string
	Contributor   string
	Licence       string
	Notes         string

	// Invented is true for rows drawn for the demo; it is no column of its
	// own: such rows carry InventedMark at the start of Notes.
	Invented bool
	// Coarse is true where the place is rounded because the exact one is under
	// embargo; such rows carry CoarseMark in Notes.
	Coarse bool
	// Private is true of a row that only some people see, among them who asks;
	// its Measurement starts with PrivatePrefix.
	Private bool
	// WindowSinuosities are those of the stored centreline, if there is one.
	WindowSinuosities []float64
}

// InventedMark starts the notes of every row that no survey measured, so that
// "invented" travels with the row through CSV and back.
const InventedMark = "Invented for the demo."
