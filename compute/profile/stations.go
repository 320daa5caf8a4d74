package profile

import "leat/compute/flow"

// layStations makes a leg of every interval between two stations. A station is a joint without losses.
func (c *chain) layStations() error {
	stations := c.run.Stations
	n := len(stations) - 1
	channels := make([]flow.Channel, 2*n)
	for i := range n {
		if err := c.check(); err != nil {
			return err
		}
		a, b := &stations[i], &stations[i+1]
		length := b.Chainage - a.Chainage
		slope := (a.BedLevel - b.BedLevel) / length
		from, to := &channels[2*i], &channels[2*i+1]
		*from, *to = a.Channel, b.Channel
		from.Slope, to.Slope = slope, slope
		l := c.memory.leg()
		*l = leg{reach: i, start: a.Chainage - stations[0].Chainage, length: length, slope: slope, bed: a.BedLevel, subs: l.subs}
		var err error
		if l.prismatic = sameChannel(from, to); l.prismatic {
			l.stretch, err = newPrismatic(from, c.run.Discharge, length, c.run.Checkpoint, &c.memory)
		} else {
			l.stretch = newInterval(from, to, c.run.Discharge, length, c.run.Checkpoint, &c.memory)
		}
		if err != nil {
			return err
		}
		if l.inside, err = l.stretch.controls(parts); err != nil {
			return err
		}
		c.legs = append(c.legs, l)
	}
	for i := range n - 1 {
		l, next := c.legs[i], c.legs[i+1]
		below := next.side(0)
		l.joint = joint{upper: l.side(l.length), lower: below, with: below}
	}
	return nil
}

// sameChannel reports whether two stations have the very same section and roughness, so that the interval between them is prismatic.
func sameChannel(a, b *flow.Channel) bool {
	return a.Section == b.Section && a.Law == b.Law && a.Barrels == b.Barrels && a.EnergyCoefficient == b.EnergyCoefficient && a.MomentumCoefficient == b.MomentumCoefficient
}
