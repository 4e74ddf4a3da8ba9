package report

import (
	"html"
	"strings"
	"unicode"
)

// clean takes out of a name what is not to be shown: control characters, which could move the cursor of a terminal and are no XML, and the
// marks that turn the direction of text. Tabs and ends of line become blanks.
func clean(text string) string {
	return strings.Map(func(r rune) rune {
		switch {
		case r == '\t' || r == '\n' || r == '\r':
			return ' '
		case unicode.Is(unicode.Cc, r), unicode.Is(unicode.Bidi_Control, r), r == unicode.ReplacementChar, r == '\uFFFE', r == '\uFFFF':
			return -1
		}
		return r
	}, text)
}

// unbroken keeps a figure, its unit and its error on one line, by blanks that do not break.
func unbroken(text string) string {
	return strings.NewReplacer(" ± ", "\u00a0±\u00a0", " %", "\u00a0%").Replace(text)
}

// escape makes text safe inside XML and HTML.
func escape(text string) string { return html.EscapeString(clean(text)) }
