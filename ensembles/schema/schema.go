// Package schema holds the JSON Schemas (draft-07) of the project's files,
// for editors and for programs that write such files. They say what a file
// may contain; sums and other relations between values are checked by the
// decoders alone.
package schema

import _ "embed"

//go:embed profile.json
var profile []byte

//go:embed brief.json
var brief []byte

// Profile returns the schema of profiles.
func Profile() []byte { return profile }

// Brief returns the schema of briefs.
func Brief() []byte { return brief }
