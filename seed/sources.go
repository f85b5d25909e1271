package seed

// paper is an invented source with the way it measured: mixed methods are what
// a real compilation has. DOIs use 10.5555, the prefix set aside for tests.
type paper struct {
	citation    string
	doi         string
	locators    [3]string
	kind        string
	line        string
	valley      string
	survey      string
	extraction  string
	grade       string
	contributor string
	windowKm    float64 // window in km; 0 = 20 channel widths
	perWave     float64 // vertices per wavelength of its lines; 0 = not said
	pixel       float64 // m, 0 = not said
	se          float64 // standard error of ln(P - 1) it states; 0 = none
}

// Indices into papers that the drawing of rows refers to.
const (
	census   = 6
	oldCrest = 5
	bendwise = 7
	resurvey = 9
	riverA   = 10
	riverB   = 13
	slopes   = 14
)

var papers = []paper{
	0:  {"Quathrell, I. and Torvessane, A. (2009) Twelve leveed channels mapped by multibeam echo sounder. Invented Transactions on the Deep Sea Floor 4:101-128.", "10.5555/fathombend.demo.2009.101", [3]string{"Table 2", "Table 3", "p. 117"}, "peak", "thalweg", "end_to_end", "multibeam", "centreline", "surveyed", "I. Quathrell", 0, 16, 50, 0.06},
	1:  {"Mbaruelle, S. (2013) Mean sinuosity of channels on four margins. Invented Transactions on the Deep Sea Floor 8:22-51.", "10.5555/fathombend.demo.2013.22", [3]string{"Table 1", "Appendix A", "p. 40"}, "mean", "centreline", "inflections", "multibeam", "centreline", "surveyed", "S. Mbaruelle", 0, 14, 30, 0.08},
	2:  {"Haruzekki, T., Dravenholt, L. and Osk, P. (2004) Channel courses from sidescan mosaics. Imaginary Letters in Submarine Geology 12:7-19.", "", [3]string{"Fig. 3", "Fig. 5", "Table 1"}, "reach", "centreline", "end_to_end", "sidescan", "figure", "traced", "L. Dravenholt", 0, 10, 150, 0},
	3:  {"Ferrandisse, C. (1996) Long-range sidescan over slope and rise channels. Proceedings of the Society for Imaginary Surveys 31:201-230.", "", [3]string{"Fig. 9", "Plate 2", "p. 214"}, "peak", "thalweg", "unknown", "sidescan", "figure", "traced", "Census desk", 25, 8, 0, 0},
	4:  {"Oltvessane, B. and Drayquith, M. (2017) Buried channels in three dimensions. Imaginary Letters in Submarine Geology 25:60-88.", "10.5555/fathombend.demo.2017.60", [3]string{"Table 4", "Fig. 11", "p. 77"}, "mean", "centreline", "end_to_end", "seismic_3d", "grid", "surveyed", "B. Oltvessane", 0, 16, 25, 0.10},
	5:  {"Caldoquine, R. (1988) Levee crests on seismic profiles. Proceedings of the Society for Imaginary Surveys 23:1-44.", "", [3]string{"Fig. 2", "Fig. 14", "Table 6"}, "reach", "levee_crest", "unknown", "seismic_2d", "figure", "traced", "Census desk", 0, 6, 0, 0},
	6:  {"Vandomere, K. (2015) A census of channel sinuosity from the invented literature. Invented Reviews of Marine Geology 2:300-371.", "10.5555/fathombend.demo.2015.300", [3]string{"Appendix, row 14", "Appendix, row 52", "Appendix, row 80"}, "unknown", "unknown", "unknown", "unknown", "table", "quoted", "Census desk", 0, 0, 0, 0},
	7:  {"Issaveene, N. and Quathrell, I. (2021) Sinuosity bend by bend. Invented Transactions on the Deep Sea Floor 16:5-37.", "10.5555/fathombend.demo.2021.5", [3]string{"Table S1", "Table S2", "Fig. 6"}, "p90", "thalweg", "inflections", "multibeam", "centreline", "surveyed", "N. Issaveene", 0, 18, 15, 0.05},
	8:  {"Tsuruvane, E. (2011) Planform of turbidity-current channels from shipboard grids. Imaginary Letters in Submarine Geology 19:140-163.", "10.5555/fathombend.demo.2011.140", [3]string{"Table 3", "p. 151", "Fig. 8"}, "p90", "centreline", "end_to_end", "multibeam", "grid", "surveyed", "E. Tsuruvane", 0, 12, 75, 0},
	9:  {"Fathombend demonstration survey (2024) Centrelines drawn for this catalogue and measured with it. Invented data set.", "10.5555/fathombend.demo.2024.1", [3]string{"sheet 1", "sheet 2", "sheet 3"}, "reach", "centreline", "end_to_end", "multibeam", "centreline", "remeasured", "Demonstration survey", 0, 16, 10, 0.03},
	10: {"Olmendrie, J. (2018) Twelve rivers from satellite images. Invented Reviews of Fluvial Form 1:9-30.", "10.5555/fathombend.demo.2018.9", [3]string{"Table 1", "Table 1", "Fig. 4"}, "mean", "centreline", "end_to_end", "satellite", "centreline", "surveyed", "J. Olmendrie", 0, 16, 10, 0.05},
	11: {"Lindovarre, G. and Mbaruelle, S. (2006) Deep-towed profiler lines over distal channels. Proceedings of the Society for Imaginary Surveys 41:55-73.", "", [3]string{"Fig. 7", "Table 2", "p. 69"}, "mean", "thalweg", "end_to_end", "sub_bottom", "figure", "traced", "S. Mbaruelle", 20, 8, 0, 0},
	12: {"Estavelho, D. (2010) Channel belts on amplitude maps of four invented surveys. Imaginary Letters in Submarine Geology 18:1-33.", "10.5555/fathombend.demo.2010.1", [3]string{"Table 2", "Fig. 10", "p. 21"}, "peak", "centreline", "end_to_end", "seismic_3d", "grid", "surveyed", "D. Estavelho", 0, 14, 12.5, 0.08},
	13: {"Passavelle, H. (2012) River courses on a global elevation grid. Invented Reviews of Fluvial Form 0:1-12.", "", [3]string{"Table 2", "Table 2", "Fig. 1"}, "reach", "centreline", "end_to_end", "dem", "grid", "surveyed", "J. Olmendrie", 0, 12, 90, 0},
	14: {"Pellagrune, O. (2016) Slopes of the sea floor beneath invented channels. Invented Reviews of Marine Geology 3:15-48.", "10.5555/fathombend.demo.2016.15", [3]string{"Table 1", "Table 2", "Table 3"}, "", "", "", "", "", "", "", 0, 0, 0, 0},
}
