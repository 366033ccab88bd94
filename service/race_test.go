//go:build race

package main

// slowdown is what the race detector makes of running times.
const slowdown = 10
