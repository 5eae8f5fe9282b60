// Package linprog solves small dense linear programmes, such as those that
// find the best degree distribution: few columns (degrees), many rows (points
// of the decoding tunnel), solved again and again with a row, a column or a
// cost changed. A Program remembers the basis of its last answer and starts
// from it.
//
// The method is the simplex method on a dense dictionary with implicit bounds
// (Dantzig, Linear Programming and Extensions, 1963; Chvátal, Linear
// Programming, 1983, chapters 2, 3, 8 and 10): the dual simplex (Lemke, Naval
// Research Logistics Quarterly 1, 1954) repairs a violated row, the primal
// simplex a column that prices out. An answer is not read off the dictionary,
// whose entries drift with every pivot, but computed anew from the data and
// the final basis.
package linprog
