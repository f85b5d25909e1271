package catalogue

// Grade is a step of quality and what a record must show for it.
type Grade struct{ Name, Criterion string }

// Grades are the steps of quality, best first. A grade is chosen by a person
// and never changed silently.
var Grades = []Grade{
	{"remeasured", "measured by this program from a stored centreline whose vertex spacing is finer than a quarter wavelength"},
	{"surveyed", "measured by the source from a survey, with the method stated"},
	{"traced", "taken from a figure of the source"},
	{"quoted", "given by the source, the method unknown"},
}
