package flow

import "math"

// Depths are the characteristic depths of a channel at one discharge, with what follows from them. A number that cannot be
// given is NaN.
type Depths struct {
	Normal, Critical             []float64 // m, rising
	NormalAbsent, CriticalAbsent Absence   // why a list is empty
	Class                        SlopeClass
	CriticalSlope                float64

	Bank          float64 // m; NaN where not known
	Capacity      Capacity
	FullDischarge float64 // total, m3/s; closed sections on a positive slope only
	Ratio         float64 // discharge over capacity; NaN where the capacity is 0, since the law gives no conveyance up to the bank
	Surcharged    bool    // a closed section whose capacity is less than the discharge
	Freeboard     float64 // bank less the lowest normal depth, m; 0 when surcharged
	Fill          float64 // lowest normal depth over bank; 1 when surcharged
	FullFriction  float64 // friction slope of a closed section running full at this discharge
}

// Room is memory for lists of depths, so that solving does not allocate.
type Room struct{ normal, critical [8]float64 }

// Depths computes all characteristic depths of a discharge (total, m3/s). The lists lie in room as far as they fit.
func (c *Channel) Depths(discharge float64, room *Room) Depths {
	d := Depths{CriticalSlope: math.NaN(), Bank: math.NaN(), Capacity: Capacity{math.NaN(), math.NaN()}, FullDischarge: math.NaN(),
		Ratio: math.NaN(), Freeboard: math.NaN(), Fill: math.NaN(), FullFriction: math.NaN()}
	d.Normal, d.NormalAbsent = c.Normal(discharge, room.normal[:0])
	m := c.Motion(discharge)
	var margin float64
	d.Critical, d.CriticalAbsent, margin = m.critical(room.critical[:0])
	d.Class = c.Class(discharge, d.Normal, d.Critical)
	if slope, known := m.criticalSlopeBeside(d.Critical, margin); known {
		d.CriticalSlope = slope
	} else if slope, known = c.CriticalSlope(discharge); known {
		d.CriticalSlope = slope
	}
	if bank, known := c.BankHeight(); known {
		d.Bank = bank
	}
	if capacity, known := c.Capacity(); known {
		d.Capacity = capacity
		if capacity.Discharge > 0 {
			d.Ratio = discharge / capacity.Discharge
		}
	}
	if c.Section.Closed() {
		if slope := c.FullFrictionSlope(discharge); !math.IsInf(slope, 1) {
			d.FullFriction = slope
		}
		if c.Slope > 0 {
			d.FullDischarge = c.FullDischarge()
			d.Surcharged = discharge > d.Capacity.Discharge
		}
	}
	switch {
	case d.Surcharged:
		d.Freeboard, d.Fill = 0, 1
	case len(d.Normal) > 0:
		d.Freeboard, d.Fill = d.Bank-d.Normal[0], d.Normal[0]/d.Bank
	}
	return d
}
