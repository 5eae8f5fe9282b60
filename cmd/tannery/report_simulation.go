package main

import (
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

// simulationMarks are the limits to draw beside measured curves: the Shannon
// limit at their rate, the threshold if there is one, and the limit for any
// code of their length at the frame error rate.
func simulationMarks(s report.Simulation, f channel.Family, threshold *float64, frameError float64) []report.MarkValue {
	marks := []report.MarkValue{}
	if s.Channel != f.Name() {
		return marks
	}
	add := func(name string, value float64) {
		ebN0, _ := ratios(f, value, s.DesignRate)
		marks = append(marks, report.MarkValue{Name: name, Value: value, EbN0DB: ebN0})
	}
	if limit, err := f.Inverse(s.DesignRate); err == nil {
		add("Shannon limit", limit)
	}
	if threshold != nil {
		add("threshold", *threshold)
	}
	if limit := finiteLimit(f, s.DesignRate, s.Length, frameError); limit != nil {
		add("finite-length limit at frame error rate "+report.Plain(frameError), *limit)
	}
	return marks
}
