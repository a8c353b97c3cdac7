package transform

// segmentLength is the number of points whose products are summed before they are added
// to the total: it bounds the growth of the rounding error, and is what processors share.
const segmentLength = 1 << 16

// directSums sets sums[k] = sum_j x_j x_{j+k} for all k < len(sums) <= len(x).
func directSums(sums, x []float64) {
	segments := (len(x)-1)/segmentLength + 1
	partial := make([]float64, segments*len(sums))
	spread(segments, segments, func(next func() (int, bool)) {
		for i, ok := next(); ok; i, ok = next() {
			part := partial[i*len(sums):][:len(sums)]
			end := min((i+1)*segmentLength, len(x))
			for from := i * segmentLength; from < end; from += chunkLength {
				addProducts(part, x[from:], min(chunkLength, end-from))
			}
		}
	})
	clear(sums)
	for i := range segments {
		for k, v := range partial[i*len(sums):][:len(sums)] {
			sums[k] += v
		}
	}
}

// chunkLength is the number of points that are gone through for all lags before the
// next ones: with those a few hundred lags ahead they fit a first-level cache.
const chunkLength = 1 << 10

// addProducts adds to sums[k] the products x_j x_{j+k} with j < count, and j+k inside x.
func addProducts(sums, x []float64, count int) {
	k := 0
	for ; k+4 <= len(sums); k += 4 {
		// Points for which all of the four lags are inside x.
		inside := min(count, len(x)-k-3)
		if inside <= 0 {
			break
		}
		four := products4(x[:inside], x[k:k+inside+3])
		for lag := range four {
			sums[k+lag] += four[lag] + products(x[inside:count], x[min(inside+k+lag, len(x)):])
		}
	}
	for ; k < len(sums) && k < len(x); k++ {
		sums[k] += products(x[:count], x[k:])
	}
}

// products returns sum_j a_j b_j over what both have.
func products(a, b []float64) float64 {
	n := min(len(a), len(b))
	a, b = a[:n], b[:n]
	var s float64
	for j := range a {
		s += a[j] * b[j]
	}
	return s
}

// products4 returns sum_j a_j b_{j+k} for k = 0 .. 3; b is longer than a by three.
// Even and odd j have sums of their own, so that no sum waits for the one before it.
func products4(a, b []float64) [4]float64 {
	var e0, e1, e2, e3, o0, o1, o2, o3 float64
	j := 0
	for ; j+4 <= len(a); j += 4 {
		u := (*[4]float64)(a[j:])
		v := (*[7]float64)(b[j:])
		u0, u1, u2, u3 := u[0], u[1], u[2], u[3]
		e0 += u0 * v[0]
		e1 += u0 * v[1]
		e2 += u0 * v[2]
		e3 += u0 * v[3]
		o0 += u1 * v[1]
		o1 += u1 * v[2]
		o2 += u1 * v[3]
		o3 += u1 * v[4]
		e0 += u2 * v[2]
		e1 += u2 * v[3]
		e2 += u2 * v[4]
		e3 += u2 * v[5]
		o0 += u3 * v[3]
		o1 += u3 * v[4]
		o2 += u3 * v[5]
		o3 += u3 * v[6]
	}
	for ; j < len(a); j++ {
		e0 += a[j] * b[j]
		e1 += a[j] * b[j+1]
		e2 += a[j] * b[j+2]
		e3 += a[j] * b[j+3]
	}
	return [4]float64{e0 + o0, e1 + o1, e2 + o2, e3 + o3}
}
