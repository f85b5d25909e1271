package views

// TargetsPage is a file of many targets on its way or answered.
type TargetsPage struct {
	Page
	Key       string // of the answers
	All, Done int    // rows
	Bad       int    // rows without an answer
	Refused   []TargetRefusal
}

// TargetRefusal is a row of a file of targets that has no answer.
type TargetRefusal struct {
	Line          int // of the file, the header is line 1
	Field, Reason string
}

func (p TargetsPage) share() float64 {
	if p.All == 0 {
		return 0
	}
	return float64(p.Done) / float64(p.All)
}

func targetsCount(n int) string {
	if n == 1 {
		return "1 target"
	}
	return thousands(n) + " targets"
}

// outcome is how a file went, in a sentence.
func (p TargetsPage) outcome() string {
	switch {
	case p.Bad == 0:
		return targetsCount(p.All) + " answered, every row of the file."
	case p.Bad == p.All:
		return "None of the " + targetsCount(p.All) + " could be answered."
	}
	return thousands(p.All-p.Bad) + " of " + targetsCount(p.All) + " answered; " + thousands(p.Bad) + " could not be."
}
