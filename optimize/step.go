package optimize

import (
	"tannery/ensembles"
	"tannery/optimize/linprog"
)

// step is the linear programme for the next ensemble: the one whose worst gap
// to capacity, over the channels, is least if margins were linear, within a
// trust radius around the present ensemble. Its columns are the fractions of
// the variable degrees and of the check degrees, each as its distance from a
// lower end, then for each channel the change of its parameter, up and down,
// and last the worst gap.
type step struct {
	problem  Problem
	e        ensembles.Ensemble
	readings []reading
	by       []yardstick
	sensitivity
	radius float64

	programme linprog.Program
	lower     []float64 // lower end of each fraction
	row       []float64
}

const (
	// checkRadius is by how much wider than that of variable degrees the
	// trust radius of check degrees is: margins bend less in ρ.
	checkRadius = 3
	// parameterScale makes the columns of the parameters of the size of
	// fractions.
	parameterScale = 0.01
)

// proposal is the answer of a step.
type proposal struct {
	ensemble   ensembles.Ensemble
	thresholds []float64 // predicted
}

// solve returns the proposal; ok is false if no step is possible.
func (s *step) solve() (proposal, bool, error) {
	if err := s.build(); err != nil {
		return proposal{}, false, err
	}
	solution, err := s.programme.Solve()
	if err != nil || solution.Status != linprog.Optimal {
		return proposal{}, false, err
	}
	var out proposal
	fractions := make([]float64, len(s.lower))
	for i, low := range s.lower {
		fractions[i] = low + solution.X[i]
	}
	v := len(s.variables)
	lambda := distribution(s.variables, fractions[:v])
	rho := distribution(s.checks, fractions[v:])
	if len(lambda) == 0 || len(rho) == 0 {
		return proposal{}, false, nil
	}
	e, ok := withRate(ensembles.Ensemble{Lambda: lambda, Rho: rho}, s.problem.Rate)
	if !ok {
		return proposal{}, false, nil
	}
	out.ensemble = e
	for y, r := range s.readings {
		at := len(s.lower) + 2*y
		out.thresholds = append(out.thresholds, r.parameter*(1+parameterScale*(solution.X[at]-solution.X[at+1])))
	}
	return out, true, nil
}

func (s *step) build() error {
	p := &s.programme
	p.Goal = linprog.Minimize
	s.lower = nil
	add := func(now, radius float64) error {
		low := max(0, now-radius)
		s.lower = append(s.lower, low)
		column, err := p.AddColumn(0)
		if err == nil {
			err = p.SetUpper(column, min(1, now+radius)-low)
		}
		return err
	}
	for _, d := range s.variables {
		if err := add(s.e.Lambda.Fraction(d), s.radius); err != nil {
			return err
		}
	}
	for _, d := range s.checks {
		if err := add(s.e.Rho.Fraction(d), checkRadius*s.radius); err != nil {
			return err
		}
	}
	for range s.by {
		for range 2 {
			if _, err := p.AddColumn(0); err != nil {
				return err
			}
		}
	}
	if _, err := p.AddColumn(1); err != nil { // the worst gap
		return err
	}
	s.row = make([]float64, p.Columns())
	for _, rows := range []func() error{s.sums, s.limits, s.gaps, s.tunnels} {
		if err := rows(); err != nil {
			return err
		}
	}
	return nil
}

// add adds a row given by its coefficients for fractions and others.
func (s *step) add(relation linprog.Relation, rhs float64) error {
	for i, low := range s.lower {
		rhs -= s.row[i] * low
	}
	_, err := s.programme.AddRow(relation, rhs, s.row...)
	clear(s.row)
	return err
}

func (s *step) eachVariable(f func(degree float64) float64) {
	for i, d := range s.variables {
		s.row[i] += f(float64(d))
	}
}

func (s *step) eachCheck(f func(degree float64) float64) {
	for i, d := range s.checks {
		s.row[len(s.variables)+i] += f(float64(d))
	}
}

// sums: λ and ρ sum to 1, and the design rate is (1-R)∫λ = ∫ρ.
func (s *step) sums() error {
	one := func(float64) float64 { return 1 }
	s.eachVariable(one)
	if err := s.add(linprog.Equal, 1); err != nil {
		return err
	}
	s.eachCheck(one)
	if err := s.add(linprog.Equal, 1); err != nil {
		return err
	}
	s.eachVariable(func(d float64) float64 { return (1 - s.problem.Rate) / d })
	s.eachCheck(func(d float64) float64 { return -1 / d })
	return s.add(linprog.Equal, 0)
}

// limits: those of the problem, and stability.
func (s *step) limits() error {
	l := s.problem.Limits
	if l.EdgesPerBit > 0 {
		s.eachVariable(func(d float64) float64 { return 1 / d })
		if err := s.add(linprog.AtLeast, 1/l.EdgesPerBit); err != nil {
			return err
		}
	}
	hasTwo := len(s.variables) > 0 && s.variables[0] == 2
	if l.DegreeTwoParity && hasTwo {
		s.row[0] = 1
		s.eachCheck(func(d float64) float64 { return -2 / d })
		if err := s.add(linprog.AtMost, 0); err != nil {
			return err
		}
	}
	if !hasTwo {
		return nil
	}
	// λ₂ρ'(1)B ≤ 1 - margin, linearised as a product of λ₂, ρ'(1) and the
	// allowance (1-margin)/B.
	two, slope := s.e.Lambda.Fraction(2), s.e.Rho.Derivative(1)
	for y, r := range s.readings {
		f := s.by[y].family()
		allowance := func(parameter float64) float64 {
			return (1 - l.StabilityMargin) / f.Bhattacharyya(parameter)
		}
		now := allowance(r.parameter)
		change := (allowance(r.parameter*(1-parameterStep)) - now) / -parameterStep
		s.row[0] = slope
		s.eachCheck(func(d float64) float64 { return two * (d - 1) })
		at := len(s.lower) + 2*y
		s.row[at], s.row[at+1] = -change*parameterScale, change*parameterScale
		if err := s.add(linprog.AtMost, now+two*slope); err != nil {
			return err
		}
	}
	return nil
}

// gaps: the worst gap is at least each channel's, in rate.
func (s *step) gaps() error {
	for y, r := range s.readings {
		f := s.by[y].family()
		now := f.Capacity(r.parameter)
		change := (f.Capacity(r.parameter*(1-parameterStep)) - now) / -parameterStep
		at := len(s.lower) + 2*y
		s.row[at], s.row[at+1] = -change*parameterScale, change*parameterScale
		s.row[len(s.row)-1] = 1
		if err := s.add(linprog.AtLeast, now-s.problem.Rate); err != nil {
			return err
		}
	}
	return nil
}

// tunnels: every margin stays positive.
func (s *step) tunnels() error {
	fractions := len(s.lower)
	for y, r := range s.readings {
		at := fractions + 2*y
		for k, slopes := range s.slopes[y] {
			if !usable(slopes) {
				continue
			}
			rhs := -r.margins[k]
			copy(s.row, slopes[:fractions])
			for i, d := range s.variables {
				rhs += slopes[i] * s.e.Lambda.Fraction(d)
			}
			for i, d := range s.checks {
				rhs += slopes[len(s.variables)+i] * s.e.Rho.Fraction(d)
			}
			change := slopes[fractions] * r.parameter * parameterScale
			s.row[at], s.row[at+1] = change, -change
			if err := s.add(linprog.AtLeast, rhs); err != nil {
				return err
			}
		}
	}
	return nil
}
