package transient

import "testing"

func BenchmarkTurnOnSwing(b *testing.B) {
	s, g := example()
	sum := 0.0
	for b.Loop() {
		w := TurnOnSwing(400, 20, s, s.Output, g)
		sum += w.Slew[3]
	}
	if sum == 0 {
		b.Fatal("no work")
	}
}

func BenchmarkLift(b *testing.B) {
	s, g := example()
	w := TurnOnSwing(400, 20, s, s.Output, g)
	sum := 0.0
	for b.Loop() {
		sum += Lift(s, 5, w)
	}
	if sum == 0 {
		b.Fatal("no work")
	}
}

func BenchmarkRecoveryOvershoot(b *testing.B) {
	sum := 0.0
	for b.Loop() {
		sum += RecoveryOvershoot(15, 3e-9, 20e-9, 200e-12, 30e9)
	}
	if sum == 0 {
		b.Fatal("no work")
	}
}

// Thousands of these make one answer: none may allocate.
func TestNothingAllocates(t *testing.T) {
	s, g := example()
	r := Recovery{Tau: 100e-9, Transit: 50e-9, TauRR: 100e-9 / 3}
	rows := []Row{{-5, inf}, {-12, 100e-9}}
	sum := 0.0
	if n := testing.AllocsPerRun(100, func() {
		w := TurnOnSwing(400, 20, s, s.Output, g)
		v := TurnOffSwing(400, 20, s, s.Output, g)
		sum += w.Peak() + w.Mean() + w.Time() + w.End() + Lift(s, 5, w) + Pull(s, 5, v) + UniformSwing(400, 1e9).Peak()
		sum += CurrentFall(20, s, g) + CurrentRise(20, s, g) + TurnOffTime(20, s, g, 400, 0) + s.Transfer.At(30) + s.Transfer.Charge(30)
		sum += TurnOffSlope(2e9, 10, 20e-9, 200e-12) + RecoveryOvershoot(15, 3e-9, 20e-9, 200e-12, 30e9)
		sum += r.Peak(10, 1e9) + r.Charge(10, 1e9) + ForwardRecovery{5e-9, 1}.Peak(1e9, 10)
		level, _ := Permitted(rows, 20e-9)
		sum += level
	}); n != 0 {
		t.Errorf("%v allocations", n)
	}
	if sum != sum {
		t.Error("NaN")
	}
}
