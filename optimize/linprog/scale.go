package linprog

import "math"

// Coefficients are scaled to around 1 so that the tolerances, which are
// absolute, mean something: xⱼ = Cⱼx'ⱼ and row i is multiplied by Rᵢ. The
// factors are powers of two, so scaling adds no rounding and the answer to
// the scaled programme is that to the given one.
//
// The factors bring the largest entry of every row and column to 1 (Ruiz,
// RAL-TR-2001-034, 2001). The largest, not the geometric mean of all: a row of
// the design programme holds powers of a number below 1, of which the small
// ones should count as nothing.
const scalingPasses = 8 // each takes the square root of what is left

// powerOfTwo returns the power of two nearest 1/v on a logarithmic scale, 1
// for v = 0.
func powerOfTwo(v float64) float64 {
	if v == 0 || math.IsInf(v, 0) {
		return 1
	}
	_, exponent := math.Frexp(v * math.Sqrt2)
	return math.Ldexp(1, 1-exponent)
}

// scales returns the factors of all rows and columns.
func scales(a [][]float64, columns int) (rowScale, columnScale []float64) {
	row, column := make([]float64, len(a)), make([]float64, columns)
	for i := range row {
		row[i] = 1
	}
	for j := range column {
		column[j] = 1
	}
	rowMost, columnMost := make([]float64, len(a)), make([]float64, columns)
	for range scalingPasses {
		clear(rowMost)
		clear(columnMost)
		for i, entries := range a {
			for j, v := range entries {
				v = math.Abs(v) * row[i] * column[j]
				rowMost[i] = max(rowMost[i], v)
				columnMost[j] = max(columnMost[j], v)
			}
		}
		divide(row, rowMost)
		divide(column, columnMost)
	}
	for i, v := range row {
		row[i] = powerOfTwo(1 / v)
	}
	for j, v := range column {
		column[j] = powerOfTwo(1 / v)
	}
	return row, column
}

// divide divides each factor by the square root of what it is to bring to 1.
func divide(factor, most []float64) {
	for i, v := range most {
		if v > 0 {
			factor[i] /= math.Sqrt(v)
		}
	}
}

// largest returns the largest magnitude among n numbers.
func largest(n int, number func(int) float64) float64 {
	most := 0.0
	for i := range n {
		most = max(most, math.Abs(number(i)))
	}
	return most
}
