//go:build ignore

// This program prints the coefficients of exponential.go: polynomials through
// the Chebyshev points of the interval, which come within a small factor of
// the best polynomial of the same degree. Run it by
//
//	go run coefficients_generate.go
package main

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/mat"
)

func main() {
	// 2^r = 1 + r·q(r) for |r| ≤ 1/2.
	print("exponential", 6, -0.5, 0.5, func(r float64) float64 { return math.Expm1(r*math.Ln2) / r })
	// log₂ of (1+s)/(1-s) is s·q(s²), with |s| at most tanh(ln(2)·0.5861/2):
	// linear interpolation between powers of 2 misjudges a logarithm by at
	// most 0.0861.
	bound := math.Pow(math.Tanh(math.Ln2*0.5861/2), 2)
	print("logarithm", 3, 0, bound, func(u float64) float64 { s := math.Sqrt(u); return 2 / math.Ln2 * math.Atanh(s) / s })
}

func print(name string, degree int, low, high float64, f func(float64) float64) {
	n := degree + 1
	a, b := mat.NewDense(n, n, nil), mat.NewVecDense(n, nil)
	for i := range n {
		x := (low+high)/2 + (high-low)/2*math.Cos(math.Pi*(float64(i)+0.5)/float64(n))
		for k := range n {
			a.Set(i, k, math.Pow(x, float64(k)))
		}
		b.SetVec(i, f(x))
	}
	var q mat.VecDense
	if err := q.SolveVec(a, b); err != nil {
		panic(err)
	}
	for k := range n {
		fmt.Printf("%s %d: %.17g\n", name, k, q.AtVec(k))
	}
}
