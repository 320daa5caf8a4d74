package wire

import (
	"math/big"
	"math/rand/v2"
	"strconv"
	"strings"
	"testing"
)

// TestSizeOfNumbers holds the judgement of literals from their characters against exact rational arithmetic.
func TestSizeOfNumbers(t *testing.T) {
	least := new(big.Rat).SetFrac(big.NewInt(1), new(big.Int).Exp(big.NewInt(10), big.NewInt(100), nil))
	greatest := new(big.Rat).Inv(least)
	judge := func(literal string) string {
		// math/big reads exponents up to a bound only; beyond it the answer is plain.
		v, ok := new(big.Rat).SetString(literal)
		if !ok {
			t.Fatalf("math/big cannot read %q", literal)
		}
		v.Abs(v)
		switch {
		case v.Sign() == 0:
			return ""
		case v.Cmp(least) < 0:
			return codeNumberUnderflow
		case v.Cmp(greatest) > 0:
			return codeNumberOutOfRange
		}
		return ""
	}
	literals := []string{
		"0", "-0", "0e5", "0.000e-999", "1", "-1", "1e100", "1.0e100", "10e99", "0.1e101", "1.0000000001e100", "2e100", "1e101", "100000e95", "100001e95",
		"1e-100", "9.99e-101", "0.1e-99", "0.01e-99", "10e-101", "-1e-100", "-0.9999e-100",
		"1" + strings.Repeat("0", 100), "1" + strings.Repeat("0", 101), "2" + strings.Repeat("0", 100),
		"0." + strings.Repeat("0", 99) + "1", "0." + strings.Repeat("0", 100) + "1", "0." + strings.Repeat("0", 99) + "09",
		"0." + strings.Repeat("0", 110) + "1e20", strings.Repeat("9", 100), strings.Repeat("9", 101), "1e0000000000000000000000000000000001",
	}
	random := rand.New(rand.NewPCG(1, 2))
	for range 20000 {
		var b strings.Builder
		if random.IntN(2) == 0 {
			b.WriteByte('-')
		}
		digits := func(n int) {
			for range n {
				b.WriteByte("0000001239"[random.IntN(10)])
			}
		}
		if random.IntN(3) == 0 {
			b.WriteByte('0')
		} else {
			b.WriteByte("12345678991"[random.IntN(11)])
			digits(random.IntN(20))
		}
		if random.IntN(2) == 0 {
			b.WriteByte('.')
			digits(1 + random.IntN(60))
		}
		if random.IntN(4) > 0 {
			b.WriteString([]string{"e", "E", "e+", "e-", "E-"}[random.IntN(5)])
			b.WriteString(strconv.Itoa(60 + random.IntN(60)))
		}
		literals = append(literals, b.String())
	}
	limits := DefaultLimits()
	var s scanner
	for _, literal := range literals {
		if len(literal) > MaxNumberCharacters {
			continue
		}
		got := ""
		if !s.scan([]byte(literal), &limits) {
			got = s.fault.code
		}
		if want := judge(literal); got != want {
			t.Errorf("%s: %q, want %q", literal, got, want)
		}
	}
	for literal, want := range map[string]string{
		"1e99999999999999999999999999":  codeNumberOutOfRange,
		"1e-99999999999999999999999999": codeNumberUnderflow,
		"0e99999999999999999999999999":  "",
		strings.Repeat("9", 129):        codeNumberTooLong,
		"0." + strings.Repeat("1", 126): "",
		"0." + strings.Repeat("1", 127): codeNumberTooLong,
	} {
		got := ""
		if !s.scan([]byte(literal), &limits) {
			got = s.fault.code
		}
		if got != want {
			t.Errorf("%s: %q, want %q", literal, got, want)
		}
	}
}
