package main

import (
	"bytes"
	"fmt"
	"io"

	"knell/validation/trials"
)

// writeTable prints the document for a reader.
func writeTable(out io.Writer, d *document) error {
	var (
		b bytes.Buffer
		o = d.options
	)
	fmt.Fprintf(&b, `parallel efficiency expected, in percent: busy time over workers × time elapsed
a batch replaces 1/%d of the live points, %d batches are in the air; in brackets 1/%d, %d in the air
runs of %g nats of compression, %g call times of own work per batch, seed %d
`, d.Share, d.InFlight, d.FormerShare, d.FormerInFlight, d.Nats, d.Own, d.Seed)
	at, worst := 0, 0.0
	for _, n := range o.live {
		fmt.Fprintf(&b, "\n%d live points\n", n)
		t := newTable(&b, o, "workers: ", 10)
		at = lines(t, o, func(i int) string {
			r := d.Efficiency[at+i]
			worst = max(worst, r.Error, r.FormerError)
			return fmt.Sprintf("%.1f (%.1f)", 100*r.Efficiency, 100*r.Former)
		}) + at
		cells := []string{"one threshold: law (played)", "equal"}
		for _, r := range d.OneThreshold {
			if r.Live == n {
				cells = append(cells, fmt.Sprintf("%.1f (%.1f)", 100*r.Law, 100*r.Played))
			}
		}
		t.Line(cells...)
	}
	fmt.Fprintf(&b, "\nlive points for an efficiency of %g %%\n", 100*d.Enough)
	lines(newTable(&b, o, "workers: ", 10), o, func(i int) string {
		if d.LivePoints[i].Live == 0 {
			return fmt.Sprintf("> %d", mostSearched)
		}
		return fmt.Sprint(d.LivePoints[i].Live)
	})
	fmt.Fprintf(&b, `
Standard errors are %.1f or less. A slow call takes %d times as long as the others.
one threshold  k workers propose above one threshold and wait for one another; what the others of
               a round have overtaken is wasted: n ln(1 + k/n)/k
`, 100*worst, slow)
	_, err := out.Write(b.Bytes())
	return err
}

// newTable has a column for each number of workers.
func newTable(b *bytes.Buffer, o options, before string, width int) *trials.Table {
	columns := []trials.Column{{Head: "a slot is", Width: 31, Left: true}, {Head: "call times", Width: 16, Left: true}}
	for i, w := range o.workers {
		head := fmt.Sprint(w)
		if i == 0 {
			head = before + head
		}
		columns = append(columns, trials.Column{Head: head, Width: width})
	}
	return trials.NewTable(b, columns)
}

// lines prints a line for each slot and law, cell(i) the i-th in the order in which
// measure makes them, and returns their number.
func lines(t *trials.Table, o options, cell func(i int) string) int {
	i := 0
	for _, k := range slots(o.calls) {
		for _, c := range laws() {
			cells := []string{k.String(), c.name}
			for range o.workers {
				cells = append(cells, cell(i))
				i++
			}
			t.Line(cells...)
		}
	}
	return i
}
