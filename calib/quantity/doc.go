// Package quantity reads and prints physical quantities with a unit and, where
// one is stated, a standard uncertainty: "1.02(3) um".
//
// # Conventions
//
// Values and uncertainties are held in SI units. An uncertainty is always one
// standard uncertainty (JCGM 100:2008, 2.3.1), never an expanded one. The
// concise form puts the uncertainty in brackets, in units of the last digit
// shown (JCGM 100:2008, 7.2.2, second form): 1.02(3) is 1.02 with a standard
// uncertainty of 0.03, and 1.02(30) one of 0.30. A point inside the brackets makes the
// number absolute (7.2.2, third form): 1.02(0.03).
//
// A temperature in C is converted with the offset 273.15 K, its uncertainty
// without one. Units are strict: a number without its unit is an error, as is
// a unit of another dimension.
//
// The package is a leaf: text and numbers in, values and text out.
package quantity
