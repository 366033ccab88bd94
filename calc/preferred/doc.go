// Package preferred knows the values that parts are made in: the E series of
// IEC 60063 and the usual voltage ratings of capacitors and diodes.
//
// The series are from memory of IEC 60063. E48, E96 and E192 are the rounded
// geometric series 100·10^(i/n) but for 9.20 in E192, where rounding gives
// 9.19. E24 is the rounded 10·10^(i/24) but for eight values that the standard
// fixes otherwise; E12, E6 and E3 are every second, fourth and eighth value of
// E24. The voltage ratings are common practice; no standard is claimed.
//
// A value counts as preferred within a relative 1e-9, so that one which went
// through arithmetic still meets itself. Results are the float64 nearest to
// the decimal value: AtLeast(4.7e-9, E6) is exactly 4.7e-9.
package preferred
