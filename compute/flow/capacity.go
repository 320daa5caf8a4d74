package flow

import "math"

// Capacity is the most that a channel carries in uniform flow up to its bank or crown.
type Capacity struct {
	Discharge float64 // total, m3/s
	Depth     float64 // m
}

// Capacity returns the greatest uniform discharge at any depth up to the bank, and the lowest depth that has it; known is false where no bank is
// known or the slope is not positive. At the crown of a closed section, and at a level bench, the limit from below counts. It does not allocate.
func (c *Channel) Capacity() (capacity Capacity, known bool) {
	bank, has := c.BankHeight()
	if !has || !(c.Slope > 0) || c.Law == nil {
		return Capacity{}, false
	}
	best, depth := c.conveyance(bank), bank
	f := c.uniform()
	if f.turning != never {
		c.branches(&f, func(b Branch) bool {
			if b.Lo >= bank {
				return false
			}
			if b.Hi < bank {
				if k := c.conveyance(b.Hi); k > best || k == best && b.Hi < depth {
					best, depth = k, b.Hi
				}
			}
			return true
		})
	}
	return Capacity{Discharge: c.barrels() * best * math.Sqrt(c.Slope), Depth: depth}, true
}

// FullDischarge returns the uniform discharge (total, m3/s) of a closed section that runs exactly full, its roof wetted.
func (c *Channel) FullDischarge() float64 {
	return c.UniformDischarge(c.Section.Full())
}

// FullFrictionSlope returns the friction slope of a closed section that runs full at a discharge (total, m3/s): (Q/K)^2.
func (c *Channel) FullFrictionSlope(discharge float64) float64 {
	q := discharge / c.barrels()
	ratio := q / c.Law.AtDischarge(c.Section.Full(), q).K
	return ratio * ratio
}
