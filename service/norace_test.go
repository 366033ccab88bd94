//go:build !race

package main

// slowdown is what the race detector makes of running times: it is off.
const slowdown = 1
