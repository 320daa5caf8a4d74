// Package profile computes steady gradually varied flow along a chain of reaches or surveyed stations: it finds the regimes, the curves, the
// jumps and the controls by itself.
//
// A sweep upstream follows the subcritical branch from every control there is, a sweep downstream the supercritical one; where both exist the
// larger specific force holds, and a jump stands where they are equal.
package profile
