// Package tanner holds Tanner graphs: their construction with exact node
// counts by progressive edge growth or at random with short-cycle removal,
// their girth and shortest cycles, their rank over GF(2) and approximate
// triangulation for encoding, and their exchange as Matrix Market files.
package tanner
