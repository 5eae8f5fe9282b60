package main

import (
	"fmt"
	"math"

	"github.com/spf13/cobra"

	"tannery/cmd/tannery/internal/report"
	"tannery/de/channel"
)

// readSimulations reads the files of --simulation.
func (o *reportOptions) readSimulations(cmd *cobra.Command) ([]report.Simulation, error) {
	simulations := []report.Simulation{}
	for _, path := range o.simulations {
		content, name, err := readInput(cmd.Context(), path, cmd.InOrStdin())
		if err != nil {
			return nil, err
		}
		s, err := report.DecodeSimulation(name, content)
		if err != nil {
			return nil, invalid(err)
		}
		s.Name = profileName([]string{path})
		simulations = append(simulations, s)
	}
	return simulations, nil
}

// sameThreshold is how far, relatively, the threshold of a matrix may be from
// that of its profile: rounding to whole nodes costs less, but for toys.
const sameThreshold = 0.01

// otherProfile says that a curve was measured on a matrix whose threshold is not
// that of the profile, if so.
func otherProfile(s report.Simulation, threshold float64) string {
	recorded := s.Threshold()
	if recorded == nil || math.Abs(recorded.Value-threshold) <= sameThreshold*threshold {
		return ""
	}
	return fmt.Sprintf("its matrix has the threshold %s = %.6g, this profile %.6g: it seems to be that of another profile", s.Symbol, recorded.Value, threshold)
}

// simulationMarks are the limits to draw beside measured curves: the threshold of
// the matrix as recorded, or else that of the profile if there is one, the Shannon
// limit at their rate, and the limit for any code of their length at the frame
// error rate. Beside curves of another channel stands what is recorded.
func simulationMarks(s report.Simulation, f channel.Family, threshold *float64, frameError float64) []report.MarkValue {
	marks := []report.MarkValue{}
	if s.Channel != f.Name() {
		return append(marks, s.Marks()...)
	}
	add := func(name string, value float64) {
		ebN0, _ := ratios(f, value, s.DesignRate)
		marks = append(marks, report.MarkValue{Name: name, Value: value, EbN0DB: ebN0})
	}
	if recorded := s.Threshold(); recorded != nil {
		add("threshold", recorded.Value)
	} else if threshold != nil {
		add("threshold", *threshold)
	}
	if limit, err := f.Inverse(s.DesignRate); err == nil {
		add("Shannon limit", limit)
	}
	if limit := finiteLimit(f, s.DesignRate, s.Length, frameError); limit != nil {
		add("finite-length limit at frame error rate "+report.Plain(frameError), *limit)
	}
	return marks
}
