// Package numeric holds the numerical methods that the models share: the Lambert-type equation of a diode with a series
// resistor, a bracketed root finder, an adaptive quadrature and an integrator of stiff initial value problems. All of them are
// bounded in work, allocate nothing in use and answer NaN to NaN, the integrator with an error.
package numeric
