package numeric

// addScaled adds k·x to y.
func addScaled(y, x []float64, k float64) {
	if k == 0 {
		return
	}
	x = x[:len(y)]
	for i := range y {
		y[i] += k * x[i]
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
			v := w[r*n+k] * scale[r]
			if v < 0 {
				v = -v
			}
			if v > best {
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

// substitute puts the solution of the system that factor has factored into its right side b.
func substitute(w []float64, n int, pivot []int, b []float64) {
	b, pivot = b[:n], pivot[:n]
	for k, at := range pivot {
		b[k], b[at] = b[at], b[k]
	}
	for i := 1; i < n; i++ {
		sum := b[i]
		row := w[i*n : i*n+i]
		x := b[:len(row)]
		for k, v := range row {
			sum -= v * x[k]
		}
		b[i] = sum
	}
	for i := n - 1; i >= 0; i-- {
		sum := b[i]
		row := w[i*n+i+1 : i*n+n]
		x := b[i+1:]
		x = x[:len(row)]
		for k, v := range row {
			sum -= v * x[k]
		}
		b[i] = sum * w[i*n+i]
	}
}
