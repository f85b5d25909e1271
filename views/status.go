package views

// StatusPage is what a keeper sees of the running program.
type StatusPage struct {
	Page
	Fault  string // why the catalogue cannot be used, "" if it can
	Facts  []StatusFact
	Routes []StatusRoute
	Fits   []StatusRoute
}

// StatusFact is one line of the page.
type StatusFact struct{ Name, Value, Note string }

// StatusRoute is one kind of request or of fit.
type StatusRoute struct {
	Name             string
	Requests, Failed uint64
	Median, P99      string // bounds, as words
}
