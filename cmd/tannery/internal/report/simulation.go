package report

import (
	"encoding/json"
	"fmt"
	"slices"

	"tannery/cmd/tannery/internal/report/picture"
)

// Simulation is a measured curve: error rates of one matrix at several channel
// parameters.
type Simulation struct {
	Name       string            `json:"name"` // of its file
	Channel    string            `json:"channel"`
	Parameter  string            `json:"parameter"`
	Length     int               `json:"length"`
	Rate       float64           `json:"rate"`
	Confidence float64           `json:"confidence"` // of the intervals, such as 0.95
	Points     []SimulationPoint `json:"points"`

	Symbol string `json:"-"`
}

// SimulationPoint is what was measured at one parameter.
type SimulationPoint struct {
	Value  float64      `json:"value"`
	EbN0DB *float64     `json:"eb_n0_db"`
	Frames int          `json:"frames"`
	Frame  MeasuredRate `json:"frame_error_rate"`
	Bit    MeasuredRate `json:"bit_error_rate"`
}

// MeasuredRate is a rate with the ends of its confidence interval.
type MeasuredRate struct {
	Rate float64 `json:"rate"`
	Low  float64 `json:"low"`
	High float64 `json:"high"`
}

// ConfidencePercent is the confidence for the caption.
func (s Simulation) ConfidencePercent() string { return Plain(100 * s.Confidence) }

// HasDB tells whether all points have an Eb/N0.
func (s Simulation) HasDB() bool {
	return len(s.Points) > 0 && !slices.ContainsFunc(s.Points, func(p SimulationPoint) bool { return p.EbN0DB == nil })
}

// SimulationCells is a row of the table.
type SimulationCells struct{ Value, EbN0, Frames, FrameRate, BitRate string }

// Cells returns the rows of the table.
func (s Simulation) Cells() []SimulationCells {
	rows := make([]SimulationCells, len(s.Points))
	for i, p := range s.Points {
		rows[i] = SimulationCells{Value: Significant(p.Value, 5), Frames: grouped(p.Frames), FrameRate: p.Frame.text(), BitRate: p.Bit.text()}
		if s.HasDB() {
			rows[i].EbN0 = Fixed(*p.EbN0DB, 3)
		}
	}
	return rows
}

func (m MeasuredRate) text() string {
	return fmt.Sprintf("%s (%s to %s)", Significant(m.Rate, 3), Significant(m.Low, 2), Significant(m.High, 2))
}

// Picture draws the curves beside the limits that the page knows.
func (s Simulation) Picture(p *Page) picture.Picture {
	inDB := s.HasDB()
	c := picture.Curves{
		Subject:    fmt.Sprintf("%s: %s code bits on %s", s.Name, grouped(s.Length), s.Channel),
		Axis:       "channel parameter " + s.Symbol,
		Confidence: s.Confidence,
		Series:     []picture.Curve{{Name: "frames"}, {Name: "bits"}},
	}
	if inDB {
		c.Axis = "Eb/N0, dB"
	}
	points := slices.Clone(s.Points)
	at := func(q SimulationPoint) float64 {
		if inDB {
			return *q.EbN0DB
		}
		return q.Value
	}
	slices.SortFunc(points, func(a, b SimulationPoint) int {
		if at(a) < at(b) {
			return -1
		}
		return 1
	})
	for _, q := range points {
		for i, m := range []MeasuredRate{q.Frame, q.Bit} {
			c.Series[i].Points = append(c.Series[i].Points, picture.CurvePoint{X: at(q), Rate: m.Rate, Low: m.Low, High: m.High})
		}
	}
	for _, l := range p.limits(s, inDB) {
		c.Limits = append(c.Limits, picture.CurveLimit(l))
	}
	return c.Picture()
}

// Mark is a limit on the axis of a simulation.
type Mark struct {
	Name string
	X    float64
}

// limits returns the Shannon limit, the threshold, and where it is known the
// limit at the length of the simulation.
func (p *Page) limits(s Simulation, inDB bool) []Mark {
	if s.Channel != p.Threshold.Channel {
		return nil
	}
	var marks []Mark
	for _, m := range p.Marks[s.Name] {
		if inDB && m.EbN0DB != nil {
			marks = append(marks, Mark{m.Name, *m.EbN0DB})
		} else if !inDB {
			marks = append(marks, Mark{m.Name, m.Value})
		}
	}
	return marks
}

// MarkValue is a limit as a channel parameter, and in dB at the rate of the
// simulation.
type MarkValue struct {
	Name   string
	Value  float64
	EbN0DB *float64
}

// DecodeSimulation reads the JSON answer of the command simulate.
func DecodeSimulation(name string, content []byte) (Simulation, error) {
	var s Simulation
	if err := json.Unmarshal(content, &s); err != nil {
		return s, fmt.Errorf("%s: found no JSON answer of simulate: %w", name, err)
	}
	return s, nil
}
