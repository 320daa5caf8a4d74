package wire

import (
	"math"
	"math/big"
	"math/rand/v2"
	"slices"
	"strings"
	"testing"

	"github.com/go-json-experiment/json/jsontext"
)

// TestUnitFactors holds the factors against exact rational arithmetic on the definitions: the international foot of 0.3048 m and
// pound of 0.45359237 kg (agreement of 1959), standard gravity of 9.80665 m/s2 (3rd CGPM, 1901).
func TestUnitFactors(t *testing.T) {
	rat := func(text string) *big.Rat {
		r, ok := new(big.Rat).SetString(text)
		if !ok {
			t.Fatal(text)
		}
		return r
	}
	ft, lb, g := rat("0.3048"), rat("0.45359237"), rat("9.80665")
	times := func(a ...*big.Rat) *big.Rat {
		p := rat("1")
		for _, x := range a {
			p.Mul(p, x)
		}
		return p
	}
	pressure := new(big.Rat).Quo(times(lb, g), times(ft, ft))
	root := new(big.Float).SetPrec(200).SetRat(ft)
	root.Sqrt(root)
	chezy, _ := root.Rat(nil)
	for q, want := range map[Quantity]*big.Rat{
		Dimensionless: rat("1"), QuantityManning: rat("1"), QuantityStrickler: rat("1"), QuantityAngle: rat("1"), QuantityTold: rat("1"),
		QuantityLength: ft, QuantityVelocity: ft, QuantityAcceleration: ft,
		QuantityArea: times(ft, ft), QuantityDischargePerLength: times(ft, ft), QuantityKinematicViscosity: times(ft, ft),
		QuantityVolume: times(ft, ft, ft), QuantityDischarge: times(ft, ft, ft),
		QuantityStress: pressure, QuantityPowerPerArea: times(pressure, ft), QuantityChezy: chezy,
	} {
		if nearest, _ := want.Float64(); US.ToSI(q, 1) != nearest {
			t.Errorf("%v: %v, want %v", q, US.ToSI(q, 1), nearest)
		}
	}
	if len(units) != 16 {
		t.Error("a quantity is not checked")
	}
}

// TestUnitFactorsPublished holds them against the figures of NIST Special Publication 811 (2008), appendix B.8 (from memory), to the
// digits printed there.
func TestUnitFactorsPublished(t *testing.T) {
	for q, want := range map[Quantity]float64{
		QuantityLength:       3.048e-1,    // foot, m
		QuantityArea:         9.290304e-2, // square foot, m2
		QuantityVolume:       2.831685e-2, // cubic foot, m3
		QuantityDischarge:    2.831685e-2, // cubic foot per second, m3/s
		QuantityStress:       4.788026e1,  // pound-force per square foot, Pa
		QuantityPowerPerArea: 1.459390e1,  // as pound-force per foot, N/m, by the second
	} {
		if got := US.ToSI(q, 1); !(math.Abs(got/want-1) <= 5e-7) {
			t.Errorf("%v: %v, want %v", q, got, want)
		}
	}
}

// TestUnitRoundTrip holds that SI passes bit for bit and that US units come back within a unit in the last place.
func TestUnitRoundTrip(t *testing.T) {
	random := rand.New(rand.NewPCG(3, 4))
	for range 20000 {
		v := (random.Float64() - 0.3) * math.Pow(10, float64(random.IntN(40)-20))
		for q := range quantities {
			if SI.ToSI(q, v) != v || SI.FromSI(q, v) != v {
				t.Fatalf("%v %v changes in SI", v, q)
			}
			back := US.FromSI(q, US.ToSI(q, v))
			if back != v && back != math.Nextafter(v, math.Inf(1)) && back != math.Nextafter(v, math.Inf(-1)) {
				t.Errorf("%v %v comes back as %v", v, q, back)
			}
		}
	}
}

func TestSystemNames(t *testing.T) {
	for _, s := range []System{SI, US} {
		if got, ok := SystemNamed(s.String()); !ok || got != s {
			t.Errorf("%v is not found by its name", s)
		}
	}
	if _, ok := SystemNamed("SI"); ok {
		t.Error("names are written in small letters only")
	}
}

// TestMemberUnits holds that each name has one meaning wherever it stands, and some entries of the table.
func TestMemberUnits(t *testing.T) {
	seen := map[string]Quantity{}
	for _, m := range MemberUnits() {
		key := m.Member + string(rune('0'+m.Column))
		if q, twice := seen[key]; twice {
			t.Errorf("%s is %v and %v", m.Member, q, m.Quantity)
		}
		seen[key] = m.Quantity
	}
	text := string(AppendUnits(nil))
	if !jsontext.Value(text).IsValid() {
		t.Fatal(text)
	}
	for _, want := range []string{
		`{"name":"depth","quantity":"length","si":{"unit":"m","ucum":"m"},"us":{"unit":"ft","ucum":"[ft_i]"}}`,
		`{"name":"discharges","quantity":"discharge","si":{"unit":"m3/s","ucum":"m3/s"},"us":{"unit":"ft3/s","ucum":"[cft_i]/s"}}`,
		`{"name":"bed_shear_stress","quantity":"stress","si":{"unit":"N/m2","ucum":"N/m2"},"us":{"unit":"lbf/ft2","ucum":"[lbf_av]/[sft_i]"}}`,
		`{"name":"stream_power","quantity":"power_per_area","si":{"unit":"W/m2","ucum":"W/m2"},"us":{"unit":"ft.lbf/(s.ft2)","ucum":"[ft_i].[lbf_av]/(s.[sft_i])"}}`,
		`{"name":"chezy","quantity":"chezy","si":{"unit":"m^(1/2)/s","ucum":null},"us":{"unit":"ft^(1/2)/s","ucum":null}}`,
		`{"name":"rows","column":1,"quantity":"area","si":{"unit":"m2","ucum":"m2"},"us":{"unit":"ft2","ucum":"[sft_i]"}}`,
		`{"name":"bed_slope","quantity":"dimensionless","si":{"unit":"","ucum":"1"},"us":{"unit":"","ucum":"1"}}`,
	} {
		if !strings.Contains(text, want) {
			t.Errorf("the table lacks %s", want)
		}
	}
	if !slices.IsSortedFunc(MemberUnits(), func(a, b MemberUnit) int { return strings.Compare(a.Member, b.Member) }) {
		t.Error("the table is not sorted by name")
	}
}
