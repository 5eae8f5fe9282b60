package report

import (
	"encoding/json"
	"errors"
	"fmt"
	"math"
	"slices"
	"strings"

	"tannery/cmd/tannery/internal/report/picture"
	"tannery/de/channel"
)

// SimulationSchema names the form of measured curves.
const SimulationSchema = "tannery/simulate/1"

// Simulation is a measured curve: error rates of one matrix at several channel
// parameters. Further keys of the file are of no concern here.
type Simulation struct {
	Schema     string             `json:"schema"`
	Matrix     string             `json:"matrix"` // digest
	Title      string             `json:"title"`
	Channel    string             `json:"channel"`
	Parameter  string             `json:"parameter"` // key of the family's parameter
	Length     int                `json:"length"`    // code bits
	DesignRate float64            `json:"design_rate"`
	Decoder    string             `json:"decoder"`
	Iterations int                `json:"max_iterations"` // 0: no limit
	Seed       uint64             `json:"seed"`
	Confidence float64            `json:"confidence"` // of the intervals, such as 0.95
	Limits     []SimulationLimit  `json:"limits"`
	Scaling    *SimulationScaling `json:"scaling"`
	Points     []SimulationPoint  `json:"points"`
	Warnings   []string           `json:"warnings"`

	Name   string `json:"-"` // of the file
	Symbol string `json:"-"`
	Note   string `json:"-"` // for the reader of a page; none if empty
}

// ThresholdName is the name of the threshold among the limits.
const ThresholdName = "threshold"

// Threshold returns the recorded threshold of the matrix, nil if there is none.
func (s Simulation) Threshold() *SimulationLimit {
	for i, l := range s.Limits {
		if l.Name == ThresholdName {
			return &s.Limits[i]
		}
	}
	return nil
}

// SimulationLimit is a limit beside the curve: the threshold, the Shannon
// limit, or that of any code of the length at a frame error rate.
type SimulationLimit struct {
	Name       string   `json:"name"`
	Value      float64  `json:"value"` // of the parameter
	EbN0DB     *float64 `json:"eb_n0_db"`
	FrameError *float64 `json:"frame_error_rate"`
}

// SimulationScaling are the parameters of the finite-length scaling law.
type SimulationScaling struct {
	Alpha    float64 `json:"alpha"`
	Beta     float64 `json:"beta"`
	Isolated bool    `json:"isolated"` // whether the law holds at that length
}

// SimulationPoint is what was measured at one parameter.
type SimulationPoint struct {
	Value       float64      `json:"value"` // of the parameter
	EbN0DB      *float64     `json:"eb_n0_db"`
	Status      string       `json:"status"` // why it ended
	Frames      int          `json:"frames"`
	FrameErrors int          `json:"frame_errors"`
	Undetected  int          `json:"undetected_errors"`
	BitErrors   int          `json:"bit_errors"`
	Iterations  float64      `json:"mean_iterations"`
	Frame       MeasuredRate `json:"frame_error_rate"`
	Bit         MeasuredRate `json:"bit_error_rate"`
	// By the scaling law; null where there is none.
	PredictedFrame *float64 `json:"predicted_frame_error_rate"`
	PredictedBit   *float64 `json:"predicted_bit_error_rate"`
}

// MeasuredRate is a rate with the ends of its confidence interval.
type MeasuredRate struct {
	Value float64 `json:"value"`
	Low   float64 `json:"low"`
	High  float64 `json:"high"`
}

// ConfidencePercent is the confidence for the caption.
func (s Simulation) ConfidencePercent() string { return Plain(100 * s.Confidence) }

// HasDB tells whether all points have an Eb/N0.
func (s Simulation) HasDB() bool {
	return len(s.Points) > 0 && !slices.ContainsFunc(s.Points, func(p SimulationPoint) bool { return p.EbN0DB == nil })
}

// SimulationCells is a row of the table.
type SimulationCells struct{ Value, EbN0, Frames, FrameRate, BitRate string }

// Conditions are what was measured, for the caption.
func (s Simulation) Conditions() string {
	text := s.Channel + ", " + grouped(s.Length) + " code bits"
	if s.Decoder != "" {
		text += ", " + s.Decoder
	}
	if s.Iterations > 0 {
		text += ", at most " + grouped(s.Iterations) + " iterations"
	}
	return text
}

// Cells returns the rows of the table.
func (s Simulation) Cells() []SimulationCells {
	rows := make([]SimulationCells, len(s.Points))
	for i, p := range s.Points {
		rows[i] = SimulationCells{Value: short(p.Value), Frames: grouped(p.Frames), FrameRate: p.Frame.text(), BitRate: p.Bit.text()}
		if s.HasDB() {
			rows[i].EbN0 = Fixed(*p.EbN0DB, 3)
		}
	}
	return rows
}

func (m MeasuredRate) text() string {
	return fmt.Sprintf("%s (%s to %s)", Significant(m.Value, 3), Significant(m.Low, 2), Significant(m.High, 2))
}

// Picture draws the curves beside limits such as the threshold.
func (s Simulation) Picture(marks []MarkValue) picture.Picture {
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
			c.Series[i].Points = append(c.Series[i].Points, picture.CurvePoint{X: at(q), Rate: m.Value, Low: m.Low, High: m.High})
		}
	}
	predicted := picture.Curve{Name: "frames by the scaling law"}
	for _, q := range points {
		if q.PredictedFrame != nil && *q.PredictedFrame > 0 {
			predicted.Points = append(predicted.Points, picture.CurvePoint{X: at(q), Rate: *q.PredictedFrame})
		}
	}
	if len(predicted.Points) > 0 {
		c.Series = append(c.Series, predicted)
	}
	for _, m := range marks {
		if inDB && m.EbN0DB != nil {
			c.Limits = append(c.Limits, picture.CurveLimit{Name: m.Name, X: *m.EbN0DB})
		} else if !inDB {
			c.Limits = append(c.Limits, picture.CurveLimit{Name: m.Name, X: m.Value})
		}
	}
	return c.Picture()
}

// MarkValue is a limit as a channel parameter, and in dB at the rate of the
// simulation.
type MarkValue struct {
	Name   string
	Value  float64
	EbN0DB *float64
}

// What a measured curve may hold: far beyond what can be measured, but what can
// be drawn.
const (
	leastRate        = 1e-18
	largestParameter = 1e9
	largestDB        = 1000
)

// DecodeSimulation reads the JSON answer of the command simulate; name stands
// for the file in errors.
func DecodeSimulation(name string, content []byte) (Simulation, error) {
	var s Simulation
	if err := json.Unmarshal(content, &s); err != nil {
		return s, jsonError(name, content, err)
	}
	if s.Schema != SimulationSchema {
		return s, fmt.Errorf("%s: schema: found %q; allowed: %s", name, s.Schema, SimulationSchema)
	}
	f, err := channel.ByName(s.Channel)
	if err != nil {
		return s, fmt.Errorf("%s: channel: found %q; allowed: %s", name, s.Channel, strings.Join(channel.Names(), ", "))
	}
	s.Symbol = f.Symbol()
	var errs []error
	refuse := func(key string, found any, allowed string) {
		errs = append(errs, fmt.Errorf("%s: %s: found %v; allowed: %s", name, key, found, allowed))
	}
	if s.Length < 1 {
		refuse("length", s.Length, "a whole number of at least 1")
	}
	if !(s.DesignRate < 1) {
		refuse("design_rate", s.DesignRate, "a number below 1")
	}
	if !(s.Confidence > 0 && s.Confidence < 1) {
		refuse("confidence", s.Confidence, "a number above 0 and below 1")
	}
	if len(s.Points) == 0 {
		refuse("points", "none", "at least one")
	}
	best, worst := f.Range()
	for i, l := range s.Limits {
		if !(l.Value >= best && l.Value <= min(worst, largestParameter)) {
			refuse(fmt.Sprintf("limits[%d].value", i), l.Value, fmt.Sprintf("a parameter of %s, from %v to %v", f.Name(), best, min(worst, largestParameter)))
		}
		if l.EbN0DB != nil && !(math.Abs(*l.EbN0DB) <= largestDB) {
			refuse(fmt.Sprintf("limits[%d].eb_n0_db", i), *l.EbN0DB, fmt.Sprintf("a number from -%d to %d", largestDB, largestDB))
		}
	}
	for i, p := range s.Points {
		if !(p.Value >= best && p.Value <= min(worst, largestParameter)) {
			refuse(fmt.Sprintf("points[%d].value", i), p.Value, fmt.Sprintf("a parameter of %s, from %v to %v", f.Name(), best, min(worst, largestParameter)))
		}
		if p.EbN0DB != nil && !(math.Abs(*p.EbN0DB) <= largestDB) {
			refuse(fmt.Sprintf("points[%d].eb_n0_db", i), *p.EbN0DB, fmt.Sprintf("a number from -%d to %d", largestDB, largestDB))
		}
		if p.Frames < 1 {
			refuse(fmt.Sprintf("points[%d].frames", i), p.Frames, "a whole number of at least 1")
		} else if p.FrameErrors < 0 || p.FrameErrors > p.Frames {
			refuse(fmt.Sprintf("points[%d].frame_errors", i), p.FrameErrors, fmt.Sprintf("from 0 to %d, its frames", p.Frames))
		}
		for _, r := range []struct {
			key string
			m   MeasuredRate
		}{{"frame_error_rate", p.Frame}, {"bit_error_rate", p.Bit}} {
			key, m := r.key, r.m
			measurable := func(rate float64) bool { return rate == 0 || rate >= leastRate }
			if !(0 <= m.Low && m.Low <= m.Value && m.Value <= m.High && m.High <= 1 && measurable(m.Value) && measurable(m.High)) {
				refuse(fmt.Sprintf("points[%d].%s", i, key), fmt.Sprintf("%v in %v to %v", m.Value, m.Low, m.High), "a rate within its interval, 0 or from 1e-18 to 1")
			}
		}
	}
	return s, errors.Join(errs...)
}
