// Package earth holds the Coriolis parameter, the Earth's rotation through
// time, palaeolatitudes and geological ages. Pure.
package earth

// InputError is a refusal with the parameter it concerns and one sentence for
// the user.
type InputError struct {
	Parameter string
	Message   string
}

func (e *InputError) Error() string { return e.Parameter + ": " + e.Message }

// Input returns the parameter and the sentence; the server maps every error
// that has this method to status 400.
func (e *InputError) Input() (parameter, message string) { return e.Parameter, e.Message }
