package views

// TextBlock is a heading, a paragraph or a list.
type TextBlock struct {
	Heading, Text string
	Items         []string
}
