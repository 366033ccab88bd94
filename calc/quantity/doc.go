// Package quantity reads and writes values that carry their unit.
//
// A request gives every dimensional value as text with its unit ("63 nC",
// "50 V/ns", "4k7"), so that nC are never taken for C. Parse turns such a text
// into a plain float64 in the SI unit of its Dimension; Format writes one back
// with an SI prefix and at most four significant digits, and Parse reads what
// Format writes. Prefixes exist nowhere else in calc.
//
// # Grammar
//
//	value     = number [blank] unit            63 nC   0.22uF   -5 V   1e-9 F
//	          | code                           4k7   R47   100n   0R
//	number    = [sign] digits ["." digits] [("e"|"E") [sign] digits]
//	unit      = [prefix] symbol ["/" denominator]
//	prefix    = f p n u µ m k M G T            µ as U+00B5 or U+03BC
//	code      = digits letter [digits] | letter digits
//	typ       = value [tolerance]              220 nF ±10 %   220 nF 10%
//	tolerance = "±" number unit | ["+"] number "%" | "+" number "/" "-" number "%"
//
// The sign may be U+2212; a blank may be a no-break or a thin space; ±
// may be written +/- or +-. Each Dimension admits only the prefixes that make
// sense for it: a capacitance takes none above one, so that M is never taken
// where m is meant.
//
// Letter codes follow IEC 60062 (from memory): the letter stands for the
// decimal point and the multiplier. Whatever was read through a code is told
// in a Reading, so that the answer can show how it was understood.
//
// # Accuracy
//
// The digits and the decimal prefix are combined before the conversion to
// binary, so a parsed value is the float64 nearest to what is written: "63 nC"
// is exactly the constant 63e-9. Only min, h and deg, whose factors are not
// powers of ten, add roundings of a few parts in 10^16.
package quantity
