package density

import (
	"math"

	"tannery/ensembles"
)

// polynomial evaluates Σ fᵢ z^(i-1), the generating function of a degree
// distribution. Each term multiplies its predecessor's power by z to the gap
// between their degrees, by repeated squaring, so the cost grows with the
// number of terms and with the logarithm of the gaps, not with the degrees.
type polynomial []step

// step multiplies the running power by z^gap and adds it with its weight.
type step struct {
	gap    uint
	weight float64
}

func newPolynomial(d ensembles.Distribution) polynomial {
	p := make(polynomial, len(d))
	exponent := 0
	for i, t := range d {
		p[i] = step{uint(t.Degree - 1 - exponent), t.Fraction}
		exponent = t.Degree - 1
	}
	return p
}

// at evaluates at a real point.
func (p polynomial) at(z float64) float64 {
	power, sum := 1.0, 0.0
	for _, t := range p {
		square := z
		for gap := t.gap; gap != 0; gap >>= 1 {
			if gap&1 != 0 {
				power *= square
			}
			square *= square
		}
		sum += t.weight * power
	}
	return sum
}

// atFour evaluates at four real points, together to keep the processor's
// arithmetic units busy. It leaves out terms that are lost in rounding at all
// of them, as those of large degree mostly are.
func (p polynomial) atFour(z0, z1, z2, z3 float64) (sum0, sum1, sum2, sum3 float64) {
	power0, power1, power2, power3 := 1.0, 1.0, 1.0, 1.0
	for _, t := range p {
		square0, square1, square2, square3 := z0, z1, z2, z3
		for gap := t.gap; gap != 0; gap >>= 1 {
			if gap&1 != 0 {
				power0 *= square0
				power1 *= square1
				power2 *= square2
				power3 *= square3
			}
			square0 *= square0
			square1 *= square1
			square2 *= square2
			square3 *= square3
		}
		sum0 += t.weight * power0
		sum1 += t.weight * power1
		sum2 += t.weight * power2
		sum3 += t.weight * power3
		if math.Abs(power0) < lostInRounding*math.Abs(sum0) && math.Abs(power1) < lostInRounding*math.Abs(sum1) &&
			math.Abs(power2) < lostInRounding*math.Abs(sum2) && math.Abs(power3) < lostInRounding*math.Abs(sum3) {
			break
		}
	}
	return sum0, sum1, sum2, sum3
}

// lostInRounding is the fraction of a sum below which the terms still missing,
// whose weights add up to 1 at most, do not change it.
const lostInRounding = 1e-17

// atPair evaluates at two complex points, together to keep the processor's
// arithmetic units busy.
func (p polynomial) atPair(y, z complex128) (complex128, complex128) {
	powerY, powerZ := complex(1, 0), complex(1, 0)
	var re0, im0, re1, im1 float64
	for i, t := range p {
		squareY, squareZ := y, z
		gap := t.gap
		if i == 0 && gap&1 != 0 {
			powerY, powerZ = y, z
			gap--
		}
		for ; gap != 0; gap >>= 1 {
			if gap&1 != 0 {
				powerY *= squareY
				powerZ *= squareZ
			}
			if gap > 1 {
				squareY, squareZ = square(squareY), square(squareZ)
			}
		}
		re0 += t.weight * real(powerY)
		im0 += t.weight * imag(powerY)
		re1 += t.weight * real(powerZ)
		im1 += t.weight * imag(powerZ)
	}
	return complex(re0, im0), complex(re1, im1)
}

// square returns z² with one multiplication less than z·z.
func square(z complex128) complex128 {
	return complex((real(z)-imag(z))*(real(z)+imag(z)), 2*real(z)*imag(z))
}
