package numeric_test

import (
	"encoding/json"
	"os"
	"testing"

	"floatrail/calc/internal/numeric"
)

// TestPublishedPhilox holds Philox4x32-10 to the known answers that are distributed with the paper's library, from memory.
func TestPublishedPhilox(t *testing.T) {
	for _, c := range []struct {
		counter [4]uint32
		key     [2]uint32
		want    [4]uint32
	}{
		{[4]uint32{}, [2]uint32{}, [4]uint32{0x6627e8d5, 0xe169c58d, 0xbc57ac4c, 0x9b00dbd8}},
		{[4]uint32{0xffffffff, 0xffffffff, 0xffffffff, 0xffffffff}, [2]uint32{0xffffffff, 0xffffffff},
			[4]uint32{0x408f276d, 0x41c83b0e, 0xa20bc7c6, 0x6d5451fd}},
		// The digits of π.
		{[4]uint32{0x243f6a88, 0x85a308d3, 0x13198a2e, 0x03707344}, [2]uint32{0xa4093822, 0x299f31d0},
			[4]uint32{0xd16cfe09, 0x94fdcceb, 0x5001e420, 0x24126ea1}},
	} {
		if got := numeric.Philox(c.counter, c.key); got != c.want {
			t.Errorf("%08x with key %08x: %08x, want %08x", c.counter, c.key, got, c.want)
		}
	}
}

// TestPhiloxAgainstReference holds it to study.py, whose code for words of any width reproduces numpy.random.Philox, which is Philox4x64-10.
func TestPhiloxAgainstReference(t *testing.T) {
	text, err := os.ReadFile("../../../testdata/reference/study.json")
	if err != nil {
		t.Fatal(err)
	}
	var doc struct {
		Philox []struct {
			Counter, Words [4]uint32
			Key            [2]uint32
		}
	}
	if err := json.Unmarshal(text, &doc); err != nil {
		t.Fatal(err)
	}
	if len(doc.Philox) < 40 {
		t.Fatalf("%d cases", len(doc.Philox))
	}
	for _, c := range doc.Philox {
		if got := numeric.Philox(c.Counter, c.Key); got != c.Words {
			t.Errorf("%08x with key %08x: %08x, want %08x", c.Counter, c.Key, got, c.Words)
		}
	}
}

// TestUnitStaysInside looks at the ends: neither 0 nor 1 is ever drawn, and the cells lie symmetrically about 1/2.
func TestUnitStaysInside(t *testing.T) {
	low, high := numeric.Unit(0, 0), numeric.Unit(0xffffffff, 0xffffffff)
	if low != 0x1p-53 || high != 1-0x1p-53 {
		t.Errorf("from %g to 1 - %g, want 2^-53 from either end", low, 1-high)
	}
	if mid := numeric.Unit(0x80000000, 0); mid <= 0.5 || mid > 0.5+0x1p-50 {
		t.Errorf("half the bits give %g", mid)
	}
	if a, b := numeric.Unit(1, 0), numeric.Unit(0, 0xffffffff); a <= b {
		t.Errorf("%g is not above %g", a, b)
	}
}
