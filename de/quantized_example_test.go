package de_test

import (
	"context"
	"fmt"
	"math"

	"tannery/de"
	"tannery/de/channel"
	"tannery/de/density"
	"tannery/ensembles"
)

// A link from a buoy whose receiver gives two levels of confidence and
// sometimes nothing: its LLRs are point masses. The messages of a (3,6)
// ensemble are evolved on it, step by step.
func ExampleEvolution() {
	buoy := channel.Density{Atoms: []channel.Atom{
		{Magnitude: 0, Mass: .05},
		{Magnitude: 1.5, Mass: .25},
		{Magnitude: 4, Mass: .70},
	}}
	grid, err := density.NewGrid(512)
	if err != nil {
		fmt.Println(err)
		return
	}
	v := de.NewEvolution(ensembles.Regular(3, 6), grid, buoy)
	for i := range 6 {
		fmt.Printf("%d: error probability %.5f, entropy %.5f, B %.5f\n",
			i, v.Messages.ErrorProbability(), v.Messages.Entropy(), v.Messages.Bhattacharyya())
		v.Step()
	}
	fmt.Printf("decision on a bit: %.6f\n", v.DecisionError())
	// Output:
	// 0: error probability 0.08320, entropy 0.31232, B 0.42916
	// 1: error probability 0.05782, entropy 0.22041, B 0.31664
	// 2: error probability 0.04249, entropy 0.16341, B 0.24362
	// 3: error probability 0.03047, entropy 0.11819, B 0.18319
	// 4: error probability 0.02003, entropy 0.07865, B 0.12777
	// 5: error probability 0.01107, entropy 0.04419, B 0.07649
	// decision on a bit: 0.001089
}

// The two operations can be used on their own: what a check node of degree 3
// and a variable node of degree 2 make of densities.
func ExampleGrid_Project() {
	grid, err := density.NewGrid(512)
	if err != nil {
		fmt.Println(err)
		return
	}
	received := grid.Project(channel.BIAWGN{}.Density(1))
	out := grid.NewDensity()

	grid.NewCheckNode(ensembles.Distribution{{Degree: 3, Fraction: 1}}).Apply(out, received)
	fmt.Printf("E[tanh²(L/2)]: %.6f, squared %.6f, after the check node %.6f\n",
		received.Moment(1), math.Pow(received.Moment(1), 2), out.Moment(1))

	grid.NewVariableNode(ensembles.Distribution{{Degree: 2, Fraction: 1}}, received).Apply(out, received)
	fmt.Printf("B: %.6f, squared %.6f, after the variable node %.6f\n",
		received.Bhattacharyya(), math.Pow(received.Bhattacharyya(), 2), out.Bhattacharyya())
	// Output:
	// E[tanh²(L/2)]: 0.550400, squared 0.302941, after the check node 0.302941
	// B: 0.606531, squared 0.367879, after the variable node 0.367879
}

// bursts is a family of channels of one's own: noise of standard deviation σ,
// and with probability 0.1 three times that, the receiver knowing when. Its
// methods are those of the Gaussian family, mixed.
type bursts struct{ channel.BIAWGN }

func (bursts) Name() string { return "bursts" }

// mix returns the mean of a property of the two Gaussian channels.
func mix(sigma float64, of func(sigma float64) float64) float64 {
	return .9*of(sigma) + .1*of(3*sigma)
}

func (b bursts) Capacity(sigma float64) float64         { return mix(sigma, b.BIAWGN.Capacity) }
func (b bursts) Bhattacharyya(sigma float64) float64    { return mix(sigma, b.BIAWGN.Bhattacharyya) }
func (b bursts) ErrorProbability(sigma float64) float64 { return mix(sigma, b.BIAWGN.ErrorProbability) }

func (b bursts) Density(sigma float64) channel.Density {
	calm, burst := b.BIAWGN.Density(sigma), b.BIAWGN.Density(3*sigma)
	return channel.Density{
		PDF: func(x float64) float64 { return .9*calm.PDF(x) + .1*burst.PDF(x) },
		End: math.Inf(1),
	}
}

// Inverse bisects the capacity, which falls with σ.
func (b bursts) Inverse(rate float64) (float64, error) {
	if !(rate > 0 && rate < 1) {
		return 0, fmt.Errorf("rate %v: must lie strictly between 0 and 1", rate)
	}
	low, high := 1e-3, 1e3
	for range 100 {
		if middle := math.Sqrt(low * high); b.Capacity(middle) > rate {
			low = middle
		} else {
			high = middle
		}
	}
	return low, nil
}

// The threshold of an ensemble on a family of channels of one's own.
func ExampleQuantizedEngine() {
	e := ensembles.Regular(3, 6)
	family := bursts{}
	threshold, err := de.QuantizedEngine{Tolerance: 1e-5}.Threshold(context.Background(), e, family)
	if err != nil {
		fmt.Println(err)
		return
	}
	limit, err := family.Inverse(e.DesignRate())
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Printf("threshold σ = %.4f, Shannon limit %.4f\n", threshold.Value, limit)
	fmt.Printf("uncertainty below 1e-5: %v\n", threshold.Uncertainty < 1e-5)
	// Output:
	// threshold σ = 0.8194, Shannon limit 0.9141
	// uncertainty below 1e-5: true
}
