package catalogue

// CheckRow returns what is odd or impossible in a row by itself. The row is
// read as Normalise leaves it. onLand may be nil.
func CheckRow(r *Row, onLand func(lat, lon float64) bool) []Finding {
	var out []Finding
	for i := range Columns {
		if f, bad := hardFinding(&Columns[i], r); bad {
			out = append(out, f)
		}
	}
	return out
}

// hardFinding applies the limits every stored cell obeys.
func hardFinding(c *Column, r *Row) (Finding, bool) {
	var e *Error
	key := c.Name + "_allowed"
	if c.num != nil {
		n := c.num(r)
		switch {
		case n.Valid:
			e = c.checkNumber(n.V)
		case c.Required:
			e, key = c.refuse("it is required"), c.Name+"_required"
		}
	} else {
		v := *c.text(r)
		e = c.checkText(v)
		if v == "" && c.Required {
			e, key = c.refuse("it is required"), c.Name+"_required"
		}
	}
	if e == nil {
		return Finding{}, false
	}
	return Finding{Column: c.Name, Key: key, Message: e.Message, Expected: e.Expected, Hard: true}, true
}

// hardError turns the first hard finding into an error.
func hardError(findings []Finding) error {
	for _, f := range findings {
		if f.Hard {
			return &Error{Code: Invalid, Field: f.Column, Message: f.Message, Expected: f.Expected}
		}
	}
	return nil
}
