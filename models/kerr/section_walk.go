package kerr

// walk sets re[j] + i im[j] to the function at ω = omega0 + j domega. All of
// them lie in the table's range.
func (s *section) walk(omega0, domega float64, re, im []float64) {
	i := 0
	for j := 0; j < len(re); {
		omega := omega0 + float64(j)*domega
		if j == 0 {
			i = s.find(omega)
		} else {
			i = s.at(omega, i)
		}
		// How many points fall into this cell.
		count := len(re) - j
		if domega != 0 {
			edge := s.bounds[i+1]
			if domega < 0 {
				edge = s.bounds[i]
			}
			// Negative where rounding has carried ω past an end of the table.
			if steps := max(0, (edge-omega)/domega); steps < float64(count) {
				count = min(count, 1+int(steps))
			}
		}
		c := &s.cells[i]
		c.points((omega-c.middle)*c.scale, domega*c.scale, re[j:j+count], im[j:j+count])
		j += count
	}
}

// pairsFrom is the number of points in a cell from which moving the polynomial to
// their middle pays.
const pairsFrom = 8

// points evaluates the polynomials at x + k dx. Points that lie opposite to each
// other about their middle share even and odd parts, so the polynomials are moved
// there first: nearly half the work of Horner's rule for each.
func (c *cell) points(x, dx float64, re, im []float64) {
	n := len(re)
	im = im[:n]
	if n < pairsFrom {
		for k := range re {
			t := x + float64(k)*dx
			re[k], im[k] = c.re[cellTerms-1], c.im[cellTerms-1]
			for i := cellTerms - 2; i >= 0; i-- {
				re[k], im[k] = c.re[i]+t*re[k], c.im[i]+t*im[k]
			}
		}
		return
	}
	half := float64(n-1) / 2 * dx
	var a, b [cellTerms]float64
	shift(&a, &c.re, x+half)
	shift(&b, &c.im, x+half)
	h := n / 2
	re[h], im[h] = a[0], b[0] // the middle, if there is one
	re0, im0 := re[:h], im[:h]
	re1, im1 := re[n-h:], im[n-h:]
	for k := range re0 {
		t := float64(k)*dx - half
		u := t * t
		even := a[0] + u*(a[2]+u*(a[4]+u*(a[6]+u*a[8])))
		odd := t * (a[1] + u*(a[3]+u*(a[5]+u*(a[7]+u*a[9]))))
		re0[k] = even + odd
		re1[h-1-k] = even - odd
		even = b[0] + u*(b[2]+u*(b[4]+u*(b[6]+u*b[8])))
		odd = t * (b[1] + u*(b[3]+u*(b[5]+u*(b[7]+u*b[9]))))
		im0[k] = even + odd
		im1[h-1-k] = even - odd
	}
}

// shift sets to to the coefficients of the polynomial from in powers of x - by.
func shift(to, from *[cellTerms]float64, by float64) {
	*to = *from
	for i := range cellTerms - 1 {
		s := to[cellTerms-1]
		for j := cellTerms - 2; j >= i; j-- {
			s = to[j] + by*s
			to[j] = s
		}
	}
}
