package transform

import "math"

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
		w1, w2, w3 := w[0], w[1], w[2]
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
			y1[q] = (evenDifference + oddDifference) * w1
			y2[q] = (evenSum - oddSum) * w2
			y3[q] = (evenDifference - oddDifference) * w3
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
			b := butterfly5(x0[q], x1[q], x2[q], x3[q], x4[q])
			y0[q] = b[0]
			y1[q] = b[1] * w[0]
			y2[q] = b[2] * w[1]
			y3[q] = b[3] * w[2]
			y4[q] = b[4] * w[3]
		}
	}
}

var (
	cosineFifth    = math.Cos(2 * math.Pi / 5)
	cosineTwoFifth = math.Cos(4 * math.Pi / 5)
	sineFifth      = math.Sin(2 * math.Pi / 5)
	sineTwoFifth   = math.Sin(4 * math.Pi / 5)
)

// butterfly5 is the transform of five numbers.
func butterfly5(a, b, c, d, e complex128) [5]complex128 {
	outerSum, outerDifference := b+e, b-e
	innerSum, innerDifference := c+d, c-d
	m1 := complex(real(a)+cosineFifth*real(outerSum)+cosineTwoFifth*real(innerSum),
		imag(a)+cosineFifth*imag(outerSum)+cosineTwoFifth*imag(innerSum))
	m2 := complex(real(a)+cosineTwoFifth*real(outerSum)+cosineFifth*real(innerSum),
		imag(a)+cosineTwoFifth*imag(outerSum)+cosineFifth*imag(innerSum))
	s1 := complex(sineFifth*imag(outerDifference)+sineTwoFifth*imag(innerDifference),
		-sineFifth*real(outerDifference)-sineTwoFifth*real(innerDifference))
	s2 := complex(sineTwoFifth*imag(outerDifference)-sineFifth*imag(innerDifference),
		-sineTwoFifth*real(outerDifference)+sineFifth*real(innerDifference))
	return [5]complex128{a + outerSum + innerSum, m1 + s1, m2 + s2, m2 - s2, m1 - s1}
}

// turn multiplies by -i, a quarter turn.
func turn(z complex128) complex128 { return complex(imag(z), -real(z)) }
