package catalogue

import "errors"

// Code says what sort of failure an Error is; the server maps it to an HTTP
// status in one place.
type Code string

// The codes.
const (
	Invalid   Code = "invalid"   // a value typed or sent is not allowed: 400 or 422
	NotFound  Code = "not_found" // 404
	Conflict  Code = "conflict"  // someone else changed it first: 409
	Forbidden Code = "forbidden" // 403
	Internal  Code = "internal"  // 500: the cause is for the log only

	// Unavailable: the file cannot be read or written at present (disk full,
	// locked, not writable); nothing was stored and trying again may help: 503.
	Unavailable Code = "unavailable"
)

// Error is what every exported method of this room returns on failure. Message
// is a sentence for the user; Cause is for the operator's log and is never
// shown.
type Error struct {
	Code     Code
	Field    string // the parameter, column or form field, "" if none
	Message  string
	Expected string // what would have been accepted, "" if not applicable
	Cause    error
}

func (e *Error) Error() string {
	s := e.Message
	if e.Field != "" {
		s = e.Field + ": " + s
	}
	if e.Expected != "" {
		s += " (expected " + e.Expected + ")"
	}
	if e.Cause != nil {
		s += ": " + e.Cause.Error()
	}
	return s
}

func (e *Error) Unwrap() error { return e.Cause }

// CodeOf returns the code of err, Internal when it carries none.
func CodeOf(err error) Code {
	var e *Error
	if errors.As(err, &e) {
		return e.Code
	}
	return Internal
}
