package catalogue

import (
	"context"
	"encoding/json"
	"time"
)

// Override is the reason with which a record was accepted although a check
// found it odd.
type Override struct {
	Reason string
	Who    string // who gave it, and who accepted it
	At     time.Time
}

// Overrides returns the reasons given for an accepted measurement by the key of
// the check, the latest of each. Those of a contribution that only some people
// see stay out: they may say what is hidden.
func (s *Store) Overrides(ctx context.Context, measurement string) (map[string]Override, error) {
	rows, err := s.r.QueryContext(ctx, `SELECT DISTINCT u.overrides, t.at, `+partiesExpr+`, t.id FROM revisions v JOIN change_sets t ON t.id = v.change_set_id JOIN submissions u ON u.id = t.submission_id
		LEFT JOIN accounts a ON a.id = t.account_id LEFT JOIN accounts b ON b.id = t.author_id
		WHERE v.record = ? AND u.overrides <> '{}' AND NOT EXISTS (SELECT 1 FROM hidden_rows h WHERE h.id = u.id) ORDER BY t.id`, "measurement:"+measurement)
	if err != nil {
		return nil, fault("overrides", err)
	}
	defer rows.Close()
	out := map[string]Override{}
	for rows.Next() {
		var reasons, at, who string
		var set int64
		if err := rows.Scan(&reasons, &at, &who, &set); err != nil {
			return nil, fault("overrides", err)
		}
		given := map[string]string{}
		if err := json.Unmarshal([]byte(reasons), &given); err != nil {
			return nil, fault("overrides", err)
		}
		for key, reason := range given {
			if reason != "" {
				out[key] = Override{reason, who, parseTime(at)}
			}
		}
	}
	return out, fault("overrides", rows.Err())
}
