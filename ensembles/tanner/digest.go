package tanner

import (
	"crypto/sha256"
	"encoding/binary"
	"encoding/hex"
)

// Digest returns the SHA-256 of the parity-check matrix, as text: the same
// for the same rows and columns in the same order, however they came about.
func (g *Graph) Digest() string {
	h := sha256.New()
	var word [4]byte
	write := func(n int32) {
		binary.LittleEndian.PutUint32(word[:], uint32(n))
		h.Write(word[:])
	}
	write(int32(g.Variables()))
	write(int32(g.Checks()))
	for c := range g.Checks() {
		row := g.VariablesOf(c)
		write(int32(len(row)))
		for _, v := range row {
			write(v)
		}
	}
	return "sha256:" + hex.EncodeToString(h.Sum(nil))
}
