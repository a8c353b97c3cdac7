// Package series fits numbers that several recordings gave: stiffness against laser
// power, measured drag or corner frequency against height, repeats of one and the same
// measurement, and one number over months.
//
// A point is a value y with its standard uncertainty, at an abscissa x that may have
// one too. Uncertainties of points are independent; what all points share (a power
// meter's scale, a pixel's length, the viscosity) is given apart, enters after the
// fit, and is shown apart in each Parameter.
//
// # Model
//
// Curves are fitted by minimising, over parameters theta and true abscissae xi,
//
//	chi2 = sum [y_i - f(xi_i; theta)]^2/u(y_i)^2 + [x_i - xi_i]^2/u(x_i)^2    (1)
//
// which for a straight line is the solution of York, Can. J. Phys. 44 (1966) 1079 and York,
// Evensen, Martinez and De Basabe Delgado, Am. J. Phys. 72 (2004) 367. Weights that are
// merely recomputed from the slope at the measured x, without moving x, are biased towards
// small slopes (Lybanon, Am. J. Phys. 52 (1984) 22), and are not used. With
// exact abscissae this is ordinary weighted least squares. Intervals are those of the normal
// law when the uncertainties are stated, and of Student's when the scatter of the
// points had to give them.
//
// Units are the caller's, SI in this program. Nothing here reads files, prints, or
// depends on the time; random numbers come from a generator that the caller may give.
package series
