// Package static embeds the style sheet, the scripts, the fonts and the
// outlines, so that the binary needs no file beside it.
package static

import "embed"

// Files are served under /static/.
//
//go:embed *
var Files embed.FS
