package report

import (
	"bytes"
	"os"
	"testing"
)

// What is read as a measured curve is one: it can be written in every form,
// and drawn.
func FuzzDecodeSimulation(f *testing.F) {
	if content, err := os.ReadFile("../../../../testdata/simulations/buoys-2048.json"); err == nil {
		f.Add(content)
	}
	f.Add([]byte(`{"schema":"tannery/simulate/1","channel":"biawgn","length":9,"design_rate":0.5,"confidence":0.9,"points":[{"value":1,"eb_n0_db":2,"frames":1,"frame_error_rate":{"value":0,"low":0,"high":0.5},"bit_error_rate":{"value":0,"low":0,"high":0.5}}]}`))
	f.Add([]byte(`{"schema":"tannery/simulate/1","points":[]}`))
	f.Fuzz(func(t *testing.T, data []byte) {
		s, err := DecodeSimulation("fuzz", data)
		if err != nil {
			return
		}
		if err := s.WriteText(&bytes.Buffer{}); err != nil {
			t.Error(err)
		}
		if err := s.WriteCSV(&bytes.Buffer{}); err != nil {
			t.Error(err)
		}
		if len(s.Points) > 50 {
			return
		}
		if _, err := s.Picture(s.Marks()).Render("svg"); err != nil {
			t.Error(err)
		}
	})
}
