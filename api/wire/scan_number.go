package wire

// MaxNumberCharacters is the length of the longest number.
const MaxNumberCharacters = 128

// number reads a number. Its length and size are judged from its characters, without parsing it: conversions of some
// literals cost a hundred times others.
func (s *scanner) number() bool {
	start := s.at
	i := start
	if s.data[i] == '-' {
		i++
	}
	integer := i
	i = s.digits(i)
	switch {
	case i == integer:
		return s.badValue()
	case s.data[integer] == '0' && i > integer+1:
		return s.fail(start, codeSyntaxError, "a number begins with a superfluous 0; leave it out")
	}
	if i < len(s.data) && s.data[i] == '.' {
		fraction := i + 1
		if i = s.digits(fraction); i == fraction {
			return s.fail(start, codeSyntaxError, "a number needs a digit after its decimal point")
		}
	}
	exponent := 0
	if i < len(s.data) && (s.data[i] == 'e' || s.data[i] == 'E') {
		exponent = i + 1
		if exponent < len(s.data) && (s.data[exponent] == '+' || s.data[exponent] == '-') {
			exponent++
		}
		if i = s.digits(exponent); i == exponent {
			return s.fail(start, codeSyntaxError, "a number needs a digit in its exponent")
		}
	}
	s.at = i
	if i-start > MaxNumberCharacters {
		return s.fail(start, codeNumberTooLong, "a number is longer than 128 characters; round it")
	}
	// Without an exponent, up to 100 characters cannot leave the range.
	if exponent == 0 && i-start <= 100 {
		return true
	}
	switch size(s.data[integer:i]) {
	case tooGreat:
		return s.fail(start, codeNumberOutOfRange, "a number is greater in size than 1e100; numbers are 0 or between 1e-100 and 1e100 in size")
	case tooSmall:
		return s.fail(start, codeNumberUnderflow, "a number is smaller in size than 1e-100; numbers are 0 or between 1e-100 and 1e100 in size")
	}
	return true
}

func (s *scanner) digits(i int) int {
	for i < len(s.data) && '0' <= s.data[i] && s.data[i] <= '9' {
		i++
	}
	return i
}

type sizeOf uint8

const (
	inRange sizeOf = iota
	tooSmall
	tooGreat
)

// size judges an unsigned literal: 0 or from 1e-100 to 1e100, both included.
func size(literal []byte) sizeOf {
	power := 0       // of ten, of the first digit that is not 0
	found := false   // such a digit
	one := true      // the digits are a 1 and zeros
	afterPoint := 0  // digits after the decimal point so far
	pointed := false // the point was passed
	i := 0
loop:
	for ; i < len(literal); i++ {
		switch c := literal[i]; {
		case c == '.':
			pointed = true
		case c == 'e' || c == 'E':
			break loop
		default:
			if pointed {
				afterPoint++
			}
			switch {
			case found:
				if !pointed {
					power++
				}
				one = one && c == '0'
			case c != '0':
				found = true
				power = -afterPoint
				one = c == '1'
			}
		}
	}
	if !found {
		return inRange
	}
	if i < len(literal) {
		i++
		negative := literal[i] == '-'
		if negative || literal[i] == '+' {
			i++
		}
		exponent := 0
		for ; i < len(literal); i++ {
			if exponent < 1_000_000 { // enough to outweigh 128 digits
				exponent = exponent*10 + int(literal[i]-'0')
			}
		}
		if negative {
			exponent = -exponent
		}
		power += exponent
	}
	switch {
	case power < -100:
		return tooSmall
	case power > 100, power == 100 && !one:
		return tooGreat
	}
	return inRange
}
