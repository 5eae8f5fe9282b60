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

// marks are the limits to draw beside measured curves.
func (o *reportOptions) marks(page *report.Page, f channel.Family, simulations []report.Simulation) map[string][]report.MarkValue {
	marks := map[string][]report.MarkValue{}
	for _, s := range simulations {
		if s.Channel != f.Name() {
			continue
		}
		add := func(name string, value float64) {
			ebN0, _ := ratios(f, value, s.DesignRate)
			marks[s.Name] = append(marks[s.Name], report.MarkValue{Name: name, Value: value, EbN0DB: ebN0})
		}
		if s.DesignRate > 0 && s.DesignRate < 1 {
			if limit, err := f.Inverse(s.DesignRate); err == nil {
				add("Shannon limit", limit)
			}
		}
		if page.Threshold.Gap != nil {
			add("threshold", page.Threshold.Threshold)
		}
		if limit := finiteLimit(f, s.DesignRate, s.Length, o.frameError.value); limit != nil {
			add("finite-length limit at frame error rate "+report.Plain(o.frameError.value), *limit)
		}
	}
	return marks
}
