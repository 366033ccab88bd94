package numeric

// Tolerances is the absolute tolerances in use. They may be changed between steps, and hold from the next one on: for a problem whose natural
// sizes depend on where it is.
func (s *Stiff) Tolerances() []float64 { return s.atol }
