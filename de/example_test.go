package de_test

import (
	"context"
	"fmt"

	"tannery/de"
	"tannery/de/channel"
	"tannery/ensembles"
)

// The threshold of the (3,6)-regular ensemble on the BEC, what binds it, and
// how far it is from what the channel allows.
func ExampleExactEngine() {
	e := ensembles.Regular(3, 6)
	t, err := de.ExactEngine{}.Threshold(context.Background(), e, channel.BEC{})
	if err != nil {
		fmt.Println(err)
		return
	}
	a, err := de.Assess(e, channel.BEC{}, t)
	if err != nil {
		fmt.Println(err)
		return
	}
	fmt.Printf("ε* = %.9f, closes at x = %.6f\n", t.Value, t.Critical[0].Entropy)
	fmt.Printf("limit %.3f, gap %.4f\n", a.Limit, a.Gap.Parameter)
	fmt.Printf("MAP at most %.6f\n", de.MAPUpperBound(e))
	// Output:
	// ε* = 0.429439814, closes at x = 0.260571
	// limit 0.500, gap 0.0706
	// MAP at most 0.488151
}

// A decoder that stops after 20 iterations needs a better channel.
func ExampleLimited() {
	e := ensembles.Regular(3, 6)
	for _, iterations := range []int{20, 50} {
		t, err := de.Limited(context.Background(), de.GaussianEngine{}, e, channel.BIAWGN{}, iterations, 1e-6)
		if err != nil {
			fmt.Println(err)
			return
		}
		fmt.Printf("%d iterations: σ = %.4f\n", iterations, t.Value)
	}
	// Output:
	// 20 iterations: σ = 0.8417
	// 50 iterations: σ = 0.8664
}

// φ and its inverse keep their digits where φ is tiny.
func ExamplePhi() {
	r := de.Phi(400)
	fmt.Printf("%.6e %.6f\n", r, de.PhiInverse(r))
	// Output: 3.276801e-45 400.000000
}
