package numeric

import "math"

// mix sets y to base + Σ a_k·u_k and d to Σ c_k·per·u_k, where u holds the vectors u_k of y's length one after the other.
func mix(y, d, base, u, a, c []float64, per float64) {
	n := len(y)
	d, base, c = d[:n], base[:n], c[:len(a)]
	copy(y, base)
	clear(d)
	k := 0
	for ; k+1 < len(a); k += 2 {
		a0, a1, c0, c1 := a[k], a[k+1], c[k]*per, c[k+1]*per
		u0, u1 := u[k*n:k*n+n], u[k*n+n:k*n+2*n]
		u0, u1 = u0[:len(y)], u1[:len(y)]
		d = d[:len(y)]
		for i := range y {
			x0, x1 := u0[i], u1[i]
			y[i] += a0*x0 + a1*x1
			d[i] += c0*x0 + c1*x1
		}
	}
	if k < len(a) {
		a0, c0 := a[k], c[k]*per
		u0 := u[k*n : k*n+n]
		u0 = u0[:len(y)]
		d = d[:len(y)]
		for i := range y {
			x := u0[i]
			y[i] += a0 * x
			d[i] += c0 * x
		}
	}
}

// factor puts the triangular factors of the n by n matrix w, row by row, into w: the lower one, whose diagonal is 1, below the
// diagonal, the upper one above it, the reciprocals of the upper one's diagonal on it. Gauss elimination, in each column with
// the largest pivot of the rows multiplied by scale, which is permuted with them: scaled by the reciprocals of their units, the
// choice does not hang on the units. False: singular, or not finite.
func factor(w []float64, n int, pivot []int, scale []float64) bool {
	w, pivot, scale = w[:n*n], pivot[:n], scale[:n]
	for k := range n {
		best, at := 0.0, -1
		for r := k; r < n; r++ {
			if v := math.Abs(w[r*n+k]) * scale[r]; v > best {
				best, at = v, r
			}
		}
		if at < 0 {
			return false
		}
		pivot[k] = at
		if at != k {
			scale[at], scale[k] = scale[k], scale[at]
			x, y := w[at*n:at*n+n], w[k*n:k*n+n]
			for i := range x {
				x[i], y[i] = y[i], x[i]
			}
		}
		inverse := 1 / w[k*n+k]
		if inverse-inverse != 0 {
			return false
		}
		w[k*n+k] = inverse
		above := w[k*n+k+1 : k*n+n]
		for r := k + 1; r < n; r++ {
			m := w[r*n+k]
			if m == 0 {
				continue
			}
			m *= inverse
			w[r*n+k] = m
			row := w[r*n+k+1 : r*n+n]
			row = row[:len(above)]
			for i, v := range above {
				row[i] -= m * v
			}
		}
	}
	return true
}

// substitute puts the solution of the system that factor has factored into its right side b. Two rows at a time: half the
// loops, and two sums that do not wait for one another.
func substitute(w []float64, n int, pivot []int, b []float64) {
	b, pivot = b[:n], pivot[:n]
	for k, at := range pivot {
		b[k], b[at] = b[at], b[k]
	}
	for i := n & 1; i < n; i += 2 { // row 0 is done where n is odd
		r0, r1 := w[i*n:i*n+i], w[i*n+n:i*n+n+i+1]
		s0, s1 := b[i], b[i+1]
		x, r := b[:len(r0)], r1[:len(r0)]
		for k, v := range r0 {
			s0 -= v * x[k]
			s1 -= r[k] * x[k]
		}
		b[i], b[i+1] = s0, s1-r1[i]*s0
	}
	i := n - 1
	for ; i > 0; i -= 2 {
		r0, r1 := w[i*n-n+i+1:i*n], w[i*n+i+1:i*n+n]
		s0, s1 := b[i-1], b[i]
		x := b[i+1:]
		x, r0 = x[:len(r1)], r0[:len(r1)]
		for k, v := range r1 {
			s1 -= v * x[k]
			s0 -= r0[k] * x[k]
		}
		s1 *= w[i*n+i]
		b[i-1], b[i] = (s0-w[i*n-n+i]*s1)*w[i*n-n+i-1], s1
	}
	if i == 0 {
		sum := b[0]
		for k := 1; k < n; k++ {
			sum -= w[k] * b[k]
		}
		b[0] = sum * w[0]
	}
}
