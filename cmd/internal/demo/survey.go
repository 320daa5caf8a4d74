package demo

import "math"

// A survey is a cross-section as levelled across a ditch: offsets from the left peg and levels above datum, in metres.
type survey struct {
	offset, level []float64
	left, right   float64 // offsets at which the banks begin
	zoned         bool    // rough banks, worth a roughness of their own
	bank          float64 // height of the lower end above the lowest point
}

func (s *survey) add(step, level float64) {
	x := step
	if n := len(s.offset); n > 0 {
		x += s.offset[n-1]
	}
	s.offset = append(s.offset, x)
	s.level = append(s.level, level)
}

// slope adds n points from where the survey stands to a level at a horizontal distance, with the wobble of real ground.
func (s *survey) slope(p *pen, run, level float64, n int, wobble float64) {
	from := s.level[len(s.level)-1]
	for i := 1; i <= n; i++ {
		y := from + (level-from)*float64(i)/float64(n)
		if i < n {
			y += p.between(-wobble, wobble)
		}
		s.add(run/float64(n), y)
	}
}

// ditchSurvey levels across a small ditch: a verge, two slopes, a bed; 8 to 13 points. Verges lie a hand above the ends'
// neighbours so that the ends are the banks.
func ditchSurvey(p *pen, bed, z, bank float64) survey {
	ground := p.between(p.parish.low, p.parish.high)
	var s survey
	s.add(0, ground)
	s.slope(p, p.between(0.5, 1.5), ground-p.between(0.02, 0.08), 1, 0)
	s.slope(p, z*bank, ground-bank, 2+p.IntN(2), 0.04*bank)
	s.left = s.offset[len(s.offset)-1]
	s.slope(p, bed, ground-bank+p.between(-0.03, 0.06), 1+p.IntN(3), 0.02)
	s.right = s.offset[len(s.offset)-1]
	s.slope(p, z*bank*p.between(0.8, 1.2), ground-p.between(0.02, 0.1), 2+p.IntN(2), 0.04*bank)
	s.slope(p, p.between(0.5, 1.5), ground+p.between(-0.02, 0.15), 1, 0)
	return s
}

// drainSurvey levels across a main drain, 11 to 25 points: plain, with a sheet-piled side, with a side ditch behind a berm
// (two troughs), or with rough banks.
func drainSurvey(p *pen, bank float64) survey {
	ground := p.between(p.parish.low, p.parish.high)
	floor := ground - bank
	var s survey
	s.add(0, ground+p.between(0, 0.2))
	s.slope(p, p.between(2, 6), ground-p.between(0.05, 0.2), 2, 0.05)
	kind := p.IntN(4)
	if kind == 2 { // a soak ditch on the land side
		s.slope(p, p.between(1, 1.6), floor+p.between(0.35, 0.6)*bank, 2, 0.03)
		s.slope(p, p.between(0.4, 1), s.level[len(s.level)-1]+p.between(-0.02, 0.05), 1, 0)
		s.slope(p, p.between(1, 1.6), ground-p.between(0.15, 0.3)*bank, 2, 0.03)
		s.slope(p, p.between(1.5, 3), s.level[len(s.level)-1], 1, 0)
	}
	s.left = s.offset[len(s.offset)-1]
	s.slope(p, bank*p.between(1.5, 2.5), floor, 3+p.IntN(2), 0.05*bank)
	s.slope(p, p.between(2, 6), floor+p.between(-0.05, 0.1), 3+p.IntN(3), 0.06)
	if kind == 1 { // sheet piles: straight up, at one offset
		s.add(0, ground-p.between(0.1, 0.4))
		s.right = s.offset[len(s.offset)-1]
		s.slope(p, p.between(1, 3), ground+p.between(0, 0.2), 2, 0.02)
	} else {
		s.slope(p, bank*p.between(1.5, 2.5), ground-p.between(0.05, 0.2), 3+p.IntN(2), 0.05*bank)
		s.right = s.offset[len(s.offset)-1]
		s.slope(p, p.between(2, 6), ground+p.between(0, 0.2), 2, 0.05)
	}
	s.zoned = kind == 3
	return s
}

// design rounds the survey to what a level reads and works out area and hydraulic radius at four fifths of the bank.
func (s *survey) design(p *pen) design {
	low := math.Inf(1)
	points := make([]string, len(s.offset))
	for i := range s.offset {
		s.offset[i] = math.Round(s.offset[i]*100) / 100
		s.level[i] = math.Round(s.level[i]*1000) / 1000
		low = min(low, s.level[i])
		points[i] = list(p.length(s.offset[i]), p.length(s.level[i]))
	}
	s.bank = min(s.level[0], s.level[len(s.level)-1]) - low
	d := 0.8 * s.bank
	area, perimeter := s.wetted(low + d)
	return design{
		section: object("kind", `"surveyed"`, "points", list(points...)),
		depth:   d, area: area, radius: area / perimeter,
	}
}

// wetted sums the wetted area and perimeter below a water level, line by line.
func (s *survey) wetted(water float64) (area, perimeter float64) {
	for i := 1; i < len(s.offset); i++ {
		run := s.offset[i] - s.offset[i-1]
		a, b := water-s.level[i-1], water-s.level[i] // depths at the two ends
		if a <= 0 && b <= 0 {
			continue
		}
		wet := 1.0 // share of the line that is wet
		if a < 0 || b < 0 {
			wet = max(a, b) / math.Abs(a-b)
		}
		area += wet * run * (max(a, 0) + max(b, 0)) / 2
		perimeter += wet * math.Hypot(run, a-b)
	}
	return area, perimeter
}
