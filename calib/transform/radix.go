package transform

// In each of these, x and y have one length, a multiple of radix x stride. Group p
// of x is read from the places p + q groups, q = 0 .. radix-1, and written to the
// places radix p + q, where each place holds stride numbers. The reslicing at the
// head of each loop tells the compiler that the indices are in range.

// radix4First is radix4 for a stride of 1.
func radix4First(y, x, roots []complex128) {
	groups := len(x) / 4
	x0, x1, x2, x3 := x[:groups], x[groups:][:groups], x[2*groups:][:groups], x[3*groups:][:groups]
	for p := range x0 {
		out := (*[4]complex128)(y[4*p:])
		w := (*[3]complex128)(roots[3*p:])
		a, b, c, d := x0[p], x1[p], x2[p], x3[p]
		evenSum, evenDifference := a+c, a-c
		oddSum, oddDifference := b+d, turn(b-d)
		out[0] = evenSum + oddSum
		out[1] = (evenDifference + oddDifference) * w[0]
		out[2] = (evenSum - oddSum) * w[1]
		out[3] = (evenDifference - oddDifference) * w[2]
	}
}

// radix4 is the stage of four inputs.
func radix4(y, x, roots []complex128, stride int) {
	groups := len(x) / 4 / stride
	for p := range groups {
		w := (*[3]complex128)(roots[3*p:])
		x0 := x[p*stride:][:stride]
		x1 := x[(p+groups)*stride:][:len(x0)]
		x2 := x[(p+2*groups)*stride:][:len(x0)]
		x3 := x[(p+3*groups)*stride:][:len(x0)]
		y0 := y[4*p*stride:][:len(x0)]
		y1 := y[(4*p+1)*stride:][:len(x0)]
		y2 := y[(4*p+2)*stride:][:len(x0)]
		y3 := y[(4*p+3)*stride:][:len(x0)]
		for q := range x0 {
			a, b, c, d := x0[q], x1[q], x2[q], x3[q]
			evenSum, evenDifference := a+c, a-c
			oddSum, oddDifference := b+d, turn(b-d)
			y0[q] = evenSum + oddSum
			y1[q] = (evenDifference + oddDifference) * w[0]
			y2[q] = (evenSum - oddSum) * w[1]
			y3[q] = (evenDifference - oddDifference) * w[2]
		}
	}
}

// radix4Last is radix4 for a single group, whose roots are all 1.
func radix4Last(y, x []complex128) {
	stride := len(x) / 4
	x0, x1, x2, x3 := x[:stride], x[stride:][:stride], x[2*stride:][:stride], x[3*stride:][:stride]
	y0, y1, y2, y3 := y[:stride], y[stride:][:stride], y[2*stride:][:stride], y[3*stride:][:stride]
	for q := range x0 {
		a, b, c, d := x0[q], x1[q], x2[q], x3[q]
		evenSum, evenDifference := a+c, a-c
		oddSum, oddDifference := b+d, turn(b-d)
		y0[q] = evenSum + oddSum
		y1[q] = evenDifference + oddDifference
		y2[q] = evenSum - oddSum
		y3[q] = evenDifference - oddDifference
	}
}

// radix2 is the stage of two inputs.
func radix2(y, x, roots []complex128, stride int) {
	groups := len(x) / 2 / stride
	for p := range groups {
		w := roots[p]
		x0 := x[p*stride:][:stride]
		x1 := x[(p+groups)*stride:][:len(x0)]
		y0 := y[2*p*stride:][:len(x0)]
		y1 := y[(2*p+1)*stride:][:len(x0)]
		for q := range x0 {
			a, b := x0[q], x1[q]
			y0[q] = a + b
			y1[q] = (a - b) * w
		}
	}
}

// radix2Last is radix2 for a single group, whose root is 1.
func radix2Last(y, x []complex128) {
	stride := len(x) / 2
	x0, x1 := x[:stride], x[stride:][:stride]
	y0, y1 := y[:stride], y[stride:][:stride]
	for q := range x0 {
		a, b := x0[q], x1[q]
		y0[q] = a + b
		y1[q] = a - b
	}
}

// radix3 is the stage of three inputs.
func radix3(y, x, roots []complex128, stride int) {
	const sine = 0.8660254037844386467637231707529361835 // sin(2 pi/3) = sqrt(3)/2
	groups := len(x) / 3 / stride
	for p := range groups {
		w1, w2 := roots[2*p], roots[2*p+1]
		x0 := x[p*stride:][:stride]
		x1 := x[(p+groups)*stride:][:len(x0)]
		x2 := x[(p+2*groups)*stride:][:len(x0)]
		y0 := y[3*p*stride:][:len(x0)]
		y1 := y[(3*p+1)*stride:][:len(x0)]
		y2 := y[(3*p+2)*stride:][:len(x0)]
		for q := range x0 {
			a, b, c := x0[q], x1[q], x2[q]
			sum, difference := b+c, b-c
			middle := complex(real(a)-0.5*real(sum), imag(a)-0.5*imag(sum))
			side := complex(sine*imag(difference), -sine*real(difference))
			y0[q] = a + sum
			y1[q] = (middle + side) * w1
			y2[q] = (middle - side) * w2
		}
	}
}

// radix5 is the stage of five inputs.
func radix5(y, x, roots []complex128, stride int) {
	const (
		quarterRoot5  = 0.5590169943749474241022934171828190589 // sqrt(5)/4
		sineFifth     = 0.9510565162951535721164393333793821434 // sin(2 pi/5)
		sineTwoFifths = 0.5877852522924731291687059546390727685 // sin(4 pi/5)
	)
	groups := len(x) / 5 / stride
	for p := range groups {
		w := (*[4]complex128)(roots[4*p:])
		x0 := x[p*stride:][:stride]
		x1 := x[(p+groups)*stride:][:len(x0)]
		x2 := x[(p+2*groups)*stride:][:len(x0)]
		x3 := x[(p+3*groups)*stride:][:len(x0)]
		x4 := x[(p+4*groups)*stride:][:len(x0)]
		y0 := y[5*p*stride:][:len(x0)]
		y1 := y[(5*p+1)*stride:][:len(x0)]
		y2 := y[(5*p+2)*stride:][:len(x0)]
		y3 := y[(5*p+3)*stride:][:len(x0)]
		y4 := y[(5*p+4)*stride:][:len(x0)]
		for q := range x0 {
			a := x0[q]
			outerSum, outer := x1[q]+x4[q], x1[q]-x4[q]
			innerSum, inner := x2[q]+x3[q], x2[q]-x3[q]
			sum := outerSum + innerSum
			y0[q] = a + sum
			// (cos(2 pi/5) + cos(4 pi/5))/2 = -1/4, and half their difference is sqrt(5)/4.
			mean := complex(real(a)-0.25*real(sum), imag(a)-0.25*imag(sum))
			spread := complex(quarterRoot5*(real(outerSum)-real(innerSum)), quarterRoot5*(imag(outerSum)-imag(innerSum)))
			middle := mean + spread
			side := complex(sineFifth*imag(outer)+sineTwoFifths*imag(inner), -sineFifth*real(outer)-sineTwoFifths*real(inner))
			y1[q] = (middle + side) * w[0]
			y4[q] = (middle - side) * w[3]
			middle = mean - spread
			side = complex(sineTwoFifths*imag(outer)-sineFifth*imag(inner), sineFifth*real(inner)-sineTwoFifths*real(outer))
			y2[q] = (middle + side) * w[1]
			y3[q] = (middle - side) * w[2]
		}
	}
}

// turn multiplies by -i, a quarter turn.
func turn(z complex128) complex128 { return complex(imag(z), -real(z)) }
