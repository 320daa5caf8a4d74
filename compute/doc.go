// Package compute and the packages below it are Leat's hydraulics: cross-sections, friction, characteristic depths,
// and what is built on them. Everything is in SI units and float64, on values; nothing here knows of HTTP, JSON,
// logging, clocks or random numbers.
package compute

// EngineVersion changes exactly when numbers in answers change. It is part of every fingerprint.
const EngineVersion = "1"

// StandardGravity is the conventional acceleration of free fall in m/s2 (3rd CGPM, 1901; ISO 80000-3).
const StandardGravity = 9.80665

// WaterDensity is the density in kg/m3 used for shear stress and stream power.
const WaterDensity = 1000.0
