package report

import (
	"io"
	"strings"
	"unicode/utf8"
)

// grid is a plain-text table: a head, a rule under it and rows, columns two spaces
// apart, numbers to the right. The standard tabwriter aligns all columns to one side.
type grid struct {
	head []string
	rows [][]string
	left int    // so many first columns are text, to the left
	last bool   // the last column is text too
	pad  string // before each line
}

// write prints the table. A row shorter than the head leaves its last cells empty.
func (g *grid) write(out io.Writer) error {
	width := make([]int, len(g.head))
	for _, row := range append([][]string{g.head}, g.rows...) {
		for i, cell := range row {
			width[i] = max(width[i], utf8.RuneCountInString(cell))
		}
	}
	rule := make([]string, len(g.head))
	for i := range rule {
		rule[i] = strings.Repeat("-", width[i])
	}
	var text strings.Builder
	for _, row := range append([][]string{g.head, rule}, g.rows...) {
		line := g.pad
		for i, cell := range row {
			if i > 0 {
				line += "  "
			}
			space := strings.Repeat(" ", width[i]-utf8.RuneCountInString(cell))
			if i < g.left || (g.last && i == len(g.head)-1) {
				line += cell + space
			} else {
				line += space + cell
			}
		}
		text.WriteString(strings.TrimRight(line, " ") + "\n")
	}
	_, err := io.WriteString(out, text.String())
	return err
}
