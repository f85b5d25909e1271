package stats

import (
	"cmp"
	"context"
	"slices"
)

// Analyse answers req on rows. ctx cancels; progress, if not nil, is called
// with a fraction 0..1. An error is an *InputError for a question that cannot
// be asked, or ctx's; a model that cannot be fitted on these rows says so in
// its Failure. Numbers that are not known are NaN.
func Analyse(ctx context.Context, rows []Row, req Request, progress func(float64)) (*Analysis, error) {
	if err := req.Validate(); err != nil {
		return nil, err
	}
	used := consider(rows, &req)
	all := newTable(used, &req, "")
	a := &Analysis{Rows: all.n(), Clusters: all.cluster.count(), Systems: all.system.count(),
		Dropped: countDropped(used), Settings: req.settings(), Used: used}
	for _, i := range all.row {
		if used[i].Invented {
			a.InventedRows++
		}
		if used[i].Private {
			a.PrivateRows++
		}
	}
	studies, err := runStudies(ctx, used, all, &req, progress)
	if err != nil {
		return nil, err
	}
	if err := report(ctx, a, studies, &req); err != nil {
		return nil, err
	}
	return a, nil
}

// runStudies fits all rows together, or each kind by itself.
func runStudies(ctx context.Context, used []UsedRow, all *table, req *Request, progress func(float64)) ([]*study, error) {
	tables, kinds := []*table{all}, []string{""}
	if req.Group == "kind" {
		tables, kinds = nil, slices.Compact(slices.Sorted(slices.Values(all.kind)))
		// Submarine systems first: they get the resamples they have alone.
		slices.SortStableFunc(kinds, func(a, b string) int {
			return cmp.Compare(btoi(a != "submarine"), btoi(b != "submarine"))
		})
		for _, k := range kinds {
			tables = append(tables, newTable(used, req, k))
		}
		if len(kinds) == 0 {
			tables, kinds = []*table{all}, []string{""}
		}
	}
	var out []*study
	for i, t := range tables {
		s := newStudy(t, req, kinds[i])
		s.seed ^= uint64(i) * groupSeeds
		part := func(p float64) {
			if progress != nil {
				progress((float64(i) + p) / float64(len(tables)))
			}
		}
		if err := s.resample(ctx, part); err != nil {
			return nil, err
		}
		if err := s.assess(ctx); err != nil {
			return nil, err
		}
		judge(s.out, req.Level)
		out = append(out, s)
	}
	return out, nil
}

// report writes the studies into the answer. Comparisons, shares, influence and
// headline are about the first study: all rows, or with group=kind the kind
// with most rows.
func report(ctx context.Context, a *Analysis, studies []*study, req *Request) (err error) {
	main := studies[0]
	for _, s := range studies {
		a.Models = append(a.Models, s.out...)
		if s.t.n() > main.t.n() {
			main = s
		}
	}
	a.Comparisons = main.comparisons()
	a.Shares, a.Parts = main.reportShares()
	a.Collinearity = collinearity(main.t, req)
	a.Separability = main.separability(a.Collinearity, a.Comparisons)
	if k := leading(main.out); k >= 0 {
		a.LeadingModel, a.Influence = main.out[k].Model, main.out[k].Influence
	}
	if a.Breakpoint, err = main.breakpoint(ctx); err != nil {
		return err
	}
	if a.Overturning, err = main.overturning(ctx); err != nil {
		return err
	}
	if a.Groups, err = groupDifferences(ctx, main, studies); err != nil {
		return err
	}
	a.Selection = main.selection(leading(main.out))
	a.Headline = main.headline(main.out)
	for _, s := range studies {
		sub := *a
		if s != main {
			sub.Separability = nil
		}
		a.Warnings = append(a.Warnings, s.warnings(&sub)...)
	}
	a.MethodsText = main.methodsText(a)
	for _, s := range studies {
		s.predictions(a.Used)
	}
	return nil
}

// predictions puts fitted values and residuals beside their rows.
func (s *study) predictions(used []UsedRow) {
	for _, f := range s.models {
		for k, i := range s.t.row {
			if f.failure == "" {
				used[i].PredictedOf[f.label] = f.predicted[k]
				used[i].ResidualOf[f.label] = f.y[k] - f.predicted[k]
			}
		}
	}
}

func btoi(b bool) int {
	if b {
		return 1
	}
	return 0
}
