package transform

// storeWhole writes the results of a transform that was done in one piece.
func storeWhole[T float64 | complex128](p *Plan, dst []T, z []complex128, pair pairing[T]) {
	var zero, last [1]T
	pair(zero[:], last[:], z[:1], z[:1], 1, p.rowRoots)
	dst[0] = zero[0]
	if len(dst) > p.half {
		dst[p.half] = last[0]
	}
	rest := dst[1:p.half]
	storeMirrored(rest, rest, z[1:], 1, p.rowRoots[1:], pair)
}

// storeMirrored pairs the elements of z with each other from both ends. Each pair is
// met from one end only, the middle one from both.
func storeMirrored[T float64 | complex128](low, high []T, z []complex128, first complex128, roots []complex128, pair pairing[T]) {
	count := (len(z) + 1) / 2
	from := len(z) - count
	pair(low[:count], high[from:], z[:count], z[from:], first, roots)
}

// chunk is the number of elements of a row that are paired before they are written
// out: the results of a block of rows and its mirror then fit a first-level cache.
const chunk = 32

// rowBlock transforms the rows from first to first + blockWidth - 1, as far as they are not
// above rows/2, and their mirrors rows - first .., and writes the results.
func rowBlock[T float64 | complex128](p *Plan, d *desk, dst []T, work []complex128, first int, pair pairing[T]) {
	columns := p.half / p.rows
	load := func(to [][]complex128, b, r int) {
		to[b], d.spare = p.row.transform(work[r*columns:][:columns], d.spare, to[b], 1)
	}
	middle := p.rows%2 == 0 && p.rows/2 >= first && p.rows/2 < first+blockWidth
	end := min(first+blockWidth, (p.rows+1)/2)
	if first == 0 {
		load(d.block, 0, 0)
		storeFirstRow(p, dst, d.block[0], pair)
		first = 1
	}
	for r := first; r < end; r++ {
		load(d.block, r-first, r)
		load(d.mirror, end-1-r, p.rows-r)
	}
	if end > first {
		storeRows(p, dst, d.block[:end-first], d.mirror[:end-first], first, pair)
	}
	if middle {
		load(d.block, 0, p.rows/2)
		storeMiddleRow(p, dst, d.block[0], pair)
	}
}

// storeFirstRow writes the results for k = 0, rows, 2 rows ..
func storeFirstRow[T float64 | complex128](p *Plan, dst []T, z []complex128, pair pairing[T]) {
	results := make([]T, len(z)+1)
	pair(results[:1], results[len(z):], z[:1], z[:1], 1, p.rowRoots)
	storeMirrored(results[1:len(z)], results[1:len(z)], z[1:], 1, p.rowRoots[1:], pair)
	for i, v := range results {
		if k := i * p.rows; k < len(dst) {
			dst[k] = v
		}
	}
}

// storeMiddleRow writes the results for k = rows/2, 3 rows/2 ..
func storeMiddleRow[T float64 | complex128](p *Plan, dst []T, z []complex128, pair pairing[T]) {
	results := make([]T, len(z))
	storeMirrored(results, results, z, p.roots.at(p.rows/2), p.rowRoots, pair)
	for i, v := range results {
		dst[p.rows/2+i*p.rows] = v
	}
}

// storeRows writes the results for k = first + b + i rows, where block[b] holds Z_k, and
// for half - k; mirror holds the rows from rows - first - len(mirror) + 1 on.
func storeRows[T float64 | complex128](p *Plan, dst []T, block, mirror [][]complex128, first int, pair pairing[T]) {
	var low, high [blockWidth][chunk]T
	width, columns := len(block), len(block[0])
	var start [blockWidth]complex128
	for b := range width {
		start[b] = p.roots.at(first + b)
	}
	for i := 0; i < columns; i += chunk {
		count := min(chunk, columns-i)
		for b := range width {
			z, m := block[b][i:i+count], mirror[width-1-b][columns-i-count:columns-i]
			pair(low[b][:count], high[width-1-b][:count], z, m, start[b], p.rowRoots[i:i+count])
		}
		scatter(dst, &low, first+i*p.rows, p.rows, width, count)
		scatter(dst, &high, p.rows-first-width+1+(columns-i-count)*p.rows, p.rows, width, count)
	}
}

// scatter sets dst[first + b + i stride] = results[b][i] for b < width and i < count.
func scatter[T float64 | complex128](dst []T, results *[blockWidth][chunk]T, first, stride, width, count int) {
	if width == blockWidth {
		r := results
		for i := range count {
			to := (*[blockWidth]T)(dst[first+i*stride:])
			to[0], to[1], to[2], to[3] = r[0][i], r[1][i], r[2][i], r[3][i]
			to[4], to[5], to[6], to[7] = r[4][i], r[5][i], r[6][i], r[7][i]
		}
		return
	}
	for i := range count {
		to := dst[first+i*stride:][:width]
		for b := range to {
			to[b] = results[b][i]
		}
	}
}
