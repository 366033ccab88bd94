package numeric

import "math/bits"

// Philox multipliers and key increments of Philox4x32: table 2 and section 3.3 of Salmon, Moraes, Dror, Shaw, "Parallel random numbers: as easy
// as 1, 2, 3", SC11, 2011; from memory, held by known answers.
const (
	philoxRounds = 10
	philoxM0     = 0xD2511F53
	philoxM1     = 0xCD9E8D57
	philoxW0     = 0x9E3779B9 // golden ratio
	philoxW1     = 0xBB67AE85 // sqrt(3) - 1
)

// Philox is the counter-based generator Philox4x32-10: 128 random bits that are a function of a counter and a key and of nothing else. For one
// key it is a bijection of the counters. Source: Salmon, Moraes, Dror, Shaw, SC11, 2011.
func Philox(counter [4]uint32, key [2]uint32) [4]uint32 {
	c0, c1, c2, c3 := counter[0], counter[1], counter[2], counter[3]
	k0, k1 := key[0], key[1]
	for range philoxRounds {
		h0, l0 := bits.Mul32(philoxM0, c0)
		h1, l1 := bits.Mul32(philoxM1, c2)
		c0, c1, c2, c3 = h1^c1^k0, l1, h0^c3^k1, l0
		k0, k1 = k0+philoxW0, k1+philoxW1
	}
	return [4]uint32{c0, c1, c2, c3}
}

// Unit makes of 64 random bits a number strictly between 0 and 1: the middle of one of 2^52 equal cells.
func Unit(high, low uint32) float64 {
	return (float64((uint64(high)<<32|uint64(low))>>12) + 0.5) * 0x1p-52
}
