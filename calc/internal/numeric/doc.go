// Package numeric holds the numerical methods that the models share: the Lambert-type equation of a diode with a series
// resistor, a bracketed root finder and an adaptive quadrature. All of them are bounded in work, allocate nothing and
// answer NaN to NaN.
package numeric
