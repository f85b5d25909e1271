package catalogue

import "strings"

// ParseORCID reads an ORCID iD, with or without hyphens or the resolver before
// it, checks its last character and returns it as 0000-0000-0000-000X. The
// empty text is no iD and no error.
//
// The check character is that of ISO/IEC 7064:2003, MOD 11-2.
func ParseORCID(text string) (string, error) {
	s := strings.TrimSpace(text)
	for _, prefix := range []string{"https://orcid.org/", "http://orcid.org/", "orcid.org/"} {
		s = strings.TrimPrefix(s, prefix)
	}
	if s == "" {
		return "", nil
	}
	digits := strings.ToUpper(strings.NewReplacer("-", "", " ", "").Replace(s))
	bad := &Error{Code: Invalid, Field: "orcid", Message: "that is not an ORCID iD", Expected: "four groups of four characters, as 0000-0002-1825-0097"}
	if len(digits) != 16 {
		return "", bad
	}
	for i := range digits {
		if d := digits[i]; (d < '0' || d > '9') && !(i == 15 && d == 'X') {
			return "", bad
		}
	}
	if digits[15] != orcidCheck(digits[:15]) {
		return "", &Error{Code: Invalid, Field: "orcid", Message: "the last character of the ORCID iD does not fit the others, so one of them is mistyped", Expected: "the iD as its page shows it"}
	}
	return digits[:4] + "-" + digits[4:8] + "-" + digits[8:12] + "-" + digits[12:], nil
}

// orcidCheck is the check character of 15 digits: ISO/IEC 7064 MOD 11-2.
func orcidCheck(digits string) byte {
	total := 0
	for _, d := range digits {
		total = (total + int(d-'0')) * 2
	}
	if check := (12 - total%11) % 11; check < 10 {
		return byte('0' + check)
	}
	return 'X'
}
