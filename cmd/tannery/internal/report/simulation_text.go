package report

import (
	"encoding/csv"
	"io"
	"strconv"

	"tannery/de/channel"
)

// interruptedStatus is the status of a point whose trials were interrupted.
const interruptedStatus = "interrupted"

// WriteText writes the curve for people.
func (s *Simulation) WriteText(w io.Writer) error {
	var t Text
	if s.Title != "" {
		t.Paragraph("%s", s.Title)
	}
	t.Heading("Measured on %s, %d code bits, %s", s.Channel, s.Length, s.Decoder)
	predicted := len(s.Points) > 0 && s.Points[0].PredictedFrame != nil
	frames, bits := s.header("iter", "frames", "wrong", "frame error rate"), s.header("", "bits", "wrong", "bit error rate")
	if predicted {
		frames, bits = append(frames, "by law"), append(bits, "by law")
	}
	var frameRows, bitRows [][]string
	for _, p := range s.Points {
		frame := append(s.place(p), Fixed(p.Iterations, 1), strconv.Itoa(p.Frames), strconv.Itoa(p.FrameErrors), p.Frame.text())
		bit := append(s.place(p), strconv.Itoa(p.Frames*s.Length), strconv.Itoa(p.BitErrors), p.Bit.text())
		if predicted {
			frame, bit = append(frame, Significant(*p.PredictedFrame, 2)), append(bit, Significant(*p.PredictedBit, 2))
		}
		frameRows, bitRows = append(frameRows, frame), append(bitRows, bit)
	}
	t.Table(frames, frameRows)
	t.Gap()
	t.Table(bits, bitRows)
	t.Gap()
	t.Paragraph("Rates with the ends of their %s %% confidence intervals. iter: iterations on average.", s.ConfidencePercent())
	if predicted {
		t.Paragraph("by law: the scaling law of the profile, α = %s, β = %s.", Significant(s.Scaling.Alpha, 4), Significant(s.Scaling.Beta, 4))
	}
	switch {
	case predicted || s.Channel != (channel.BEC{}).Name():
	case s.Scaling == nil:
		t.Paragraph("No scaling law beside it: no single critical point sets the threshold of this profile.")
	case s.Scaling.Isolated:
		t.Paragraph("No scaling law beside it: it is about decoding to the end, not in %d iterations at most.", s.Iterations)
	default:
		t.Paragraph("No scaling law beside it: at this length more than one critical point of the profile decides.")
	}
	if n := len(s.Points); n > 0 && s.Points[n-1].Status == interruptedStatus {
		t.Paragraph("Interrupted: the last row has fewer trials than asked for, and later values are missing.")
	}
	if len(s.Limits) == 0 {
		_, err := t.WriteTo(w)
		return err
	}
	t.Heading("Limits beside it")
	for _, l := range s.Limits {
		name := l.Name
		if l.FrameError != nil {
			name = "any code, this length"
		}
		text := s.Symbol + " = " + short(l.Value)
		if l.EbN0DB != nil {
			text += ", Eb/N0 " + Fixed(*l.EbN0DB, 3) + " dB"
		}
		if l.FrameError != nil {
			text += ", at frame error rate " + Plain(*l.FrameError)
		}
		t.Row(name, "%s", text)
	}
	_, err := t.WriteTo(w)
	return err
}

// header begins with how the parameter is shown; empty names are left out.
func (s *Simulation) header(names ...string) []string {
	header := []string{s.Symbol}
	if s.HasDB() {
		header = append(header, "Eb/N0 dB")
	}
	for _, name := range names {
		if name != "" {
			header = append(header, name)
		}
	}
	return header
}

// place shows the parameter of a point.
func (s *Simulation) place(p SimulationPoint) []string {
	cells := []string{short(p.Value)}
	if s.HasDB() {
		cells = append(cells, Fixed(*p.EbN0DB, 3))
	}
	return cells
}

var simulationColumns = []string{"value", "eb_n0_db", "status", "frames", "frame_errors", "undetected_errors", "bit_errors", "mean_iterations",
	"frame_error_rate", "frame_error_rate_low", "frame_error_rate_high", "bit_error_rate", "bit_error_rate_low", "bit_error_rate_high",
	"predicted_frame_error_rate", "predicted_bit_error_rate"}

// WriteCSV writes one line per parameter with every digit; what is not known
// is empty.
func (s *Simulation) WriteCSV(w io.Writer) error {
	out := csv.NewWriter(w)
	if err := out.Write(simulationColumns); err != nil {
		return err
	}
	number := func(v float64) string { return strconv.FormatFloat(v, 'g', -1, 64) }
	known := func(v *float64) string {
		if v == nil {
			return ""
		}
		return number(*v)
	}
	for _, p := range s.Points {
		if err := out.Write([]string{number(p.Value), known(p.EbN0DB), p.Status, strconv.Itoa(p.Frames), strconv.Itoa(p.FrameErrors),
			strconv.Itoa(p.Undetected), strconv.Itoa(p.BitErrors), number(p.Iterations),
			number(p.Frame.Value), number(p.Frame.Low), number(p.Frame.High), number(p.Bit.Value), number(p.Bit.Low), number(p.Bit.High),
			known(p.PredictedFrame), known(p.PredictedBit)}); err != nil {
			return err
		}
	}
	out.Flush()
	return out.Error()
}

// Marks are the limits as a picture takes them.
func (s *Simulation) Marks() []MarkValue {
	var marks []MarkValue
	for _, l := range s.Limits {
		name := l.Name
		if l.FrameError != nil {
			name += " at frame error rate " + Plain(*l.FrameError)
		}
		marks = append(marks, MarkValue{Name: name, Value: l.Value, EbN0DB: l.EbN0DB})
	}
	return marks
}
