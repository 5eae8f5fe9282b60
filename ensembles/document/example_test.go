package document_test

import (
	"fmt"

	"tannery/ensembles/document"
)

func Example() {
	doc := document.Parse("quay.yaml", []byte(`kind: link
version: 1
channel: biwagn
symbol_rate: 9600.0
blocks: 010
`))
	root := doc.Kind("link", 1)
	root.Required("channel").Choice("bec", "bsc", "biawgn")
	root.Required("symbol_rate").Float(document.Above(0))
	root.Optional("blocks").Int(1, 100)
	root.Required("source_rate").Float(document.Above(0))
	fmt.Println(doc.Err())
	// Output:
	// quay.yaml:1:1: source_rate: missing; allowed: a number above 0
	// quay.yaml:3:10: channel: found "biwagn"; allowed: biawgn (nearest of bec, bsc, biawgn)
	// quay.yaml:5:9: blocks: found 010; allowed: a whole number from 1 to 100
}
