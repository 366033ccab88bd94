package recharge

import "math"

var nan = math.NaN()
