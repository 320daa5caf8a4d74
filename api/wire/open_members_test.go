package wire

import (
	"reflect"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
)

// judgedRequest has members of the forms that the operations so far do not use.
type judgedRequest struct {
	Common
	Flows    []NamedNumber `json:"flows" quantity:"discharge" validate:"required,min=1,dive,named=1e-15:1e12"`
	Band     Pair          `json:"band" quantity:"dimensionless dimensionless" validate:"omitempty,columns=0:1 1:10"`
	Of       []string      `json:"of" validate:"omitempty,min=1"`
	Geometry Raw           `json:"geometry"`
}

func init() { compilePlan(reflect.TypeFor[judgedRequest](), plans) }

func TestOpenMembers(t *testing.T) {
	limits := Limits{ArrayItems: 5, Points: 5}
	var r judgedRequest
	body := `{"units":"us","flows":{"ten_year":1,"a/b\n":2,"none":null},"band":[0.5,2],"of":["ten_year","é"],"geometry":{"type":[1,{"x":null}]}}`
	if p := Decode([]byte(body), SI, &limits, &r); p != nil {
		t.Fatal(p)
	}
	foot3 := 0.028316846592
	want := judgedRequest{
		Common: Common{Units: "us", System: US},
		Flows:  []NamedNumber{{"ten_year", foot3}, {"a/b\n", 2 * foot3}},
		Band:   Pair{[2]float64{0.5, 2}, true}, Of: []string{"ten_year", "é"}, Geometry: Raw(`{"type":[1,{"x":null}]}`),
	}
	if diff := cmp.Diff(want, r); diff != "" {
		t.Error(diff)
	}
	if faults := Check(&r); faults != nil {
		t.Error(faults)
	}
	for _, c := range []struct {
		body   string
		status int
		want   string
	}{
		{`{}`, 422, "/flows missing_member\n"},
		{`{"flows":{}}`, 422, "/flows too_few_items\n"},
		{`{"flows":{"a":null}}`, 422, "/flows too_few_items\n"},
		{`{"flows":[1]}`, 422, "/flows wrong_type\n"},
		{`{"flows":{"a":"1","b":0,"c/d":-1,"e":1}}`, 422, "/flows/a wrong_type\n/flows/b not_positive\n/flows/c~1d not_positive\n"},
		{`{"flows":{"a":1,"b":1,"c":1,"d":1,"e":1,"f":1}}`, 413, "/flows too_many_items\n"},
		{`{"flows":{"` + strings.Repeat("x", 257) + `":1}}`, 422, "/flows too_long\n"},
		{`{"flows":{"a":1},"band":[2,0.5,1],"of":[1,"` + strings.Repeat("x", 257) + `"]}`, 422, "/band wrong_length\n/of/0 wrong_type\n/of/1 too_long\n"},
		{`{"flows":{"a":1},"band":[2,0.5],"of":[]}`, 422, "/band/0 out_of_range\n/band/1 out_of_range\n/of too_few_items\n"},
		{`{"flows":{"a":1},"band":{},"of":"x"}`, 422, "/band wrong_type\n/of wrong_type\n"},
	} {
		var r judgedRequest
		p := Decode([]byte(c.body), SI, &limits, &r)
		if got := places(p); got != c.want || status(p) != c.status {
			t.Errorf("%s:\n got %d %q\nwant %d %q", c.body, status(p), got, c.status, c.want)
		}
	}
}

// TestPlansRefuseNonsense makes sure that a tag which says nothing, or too little, stops the program at its start.
func TestPlansRefuseNonsense(t *testing.T) {
	for name, typ := range map[string]reflect.Type{
		"no json tag": reflect.TypeFor[struct{ A Number }](),
		"unknown quantity": reflect.TypeFor[struct {
			A Number `json:"a" quantity:"lenght"`
		}](),
		"unknown rule": reflect.TypeFor[struct {
			A Number `json:"a" validate:"gte=0,lte=1,latitude"`
		}](),
		"one bound": reflect.TypeFor[struct {
			A Number `json:"a" validate:"gte=0"`
		}](),
		"no number": reflect.TypeFor[struct {
			A Number `json:"a" validate:"gte=x,lte=1"`
		}](),
		"half open": reflect.TypeFor[struct {
			A Number `json:"a" validate:"gt=0,lte=1"`
		}](),
		"columns": reflect.TypeFor[struct {
			A [][2]float64 `json:"a" quantity:"length" validate:"columns=0:1 0:1"`
		}](),
		"no JSON form": reflect.TypeFor[struct {
			A chan int `json:"a"`
		}](),
		"no variant's voice": reflect.TypeFor[struct {
			A Number `json:"a" in:"x"`
		}](),
	} {
		func() {
			defer func() {
				if recover() == nil {
					t.Errorf("%s: accepted", name)
				}
			}()
			compilePlan(typ, map[reflect.Type]*plan{})
		}()
	}
}
