package report

// Cell returns text as a cell of a table that a spreadsheet program reads as text,
// without control characters.
func Cell(text string) string { return cell(text) }

// Typeset makes text safe to show on a page and spells its units as print does.
func Typeset(text string) string { return typeset(text) }

// StyleSheet is the style sheet of every page, with that of the figures in it.
func StyleSheet() string { return styleSheet() }

// Policy is the content security policy of a page that has this style sheet alone.
func Policy(style string) string { return policy(style) }
