// Package picture draws recorded results as SVG or PNG. Every picture is a
// plain struct of data with a Picture method; nothing is computed here but
// places on the paper. The same data gives the same bytes.
//
// Series differ in lightness, dashes and markers as well as in colour, so that
// pictures can be read in grey and with any kind of colour vision.
package picture
