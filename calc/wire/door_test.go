package wire

import (
	"math"
	"testing"

	"crossplumb/calc/codec"
)

func TestReckonRefusesWhatItDoesNotKnow(t *testing.T) {
	for _, row := range []struct{ name, op, in, code, field string }{
		{"unknown operation", "polarization.gain", `{}`, "unknown_operation", ""},
		{"not JSON", "polarization.loss", `{`, "malformed", ""},
		{"trailing text", "polarization.loss", `{} {}`, "malformed", ""},
		{"name twice", "polarization.loss", `{"near":{"slant_deg":1,"slant_deg":2},"far":{"slant_deg":0}}`, "malformed", "near.slant_deg"},
		{"unknown field", "polarization.loss", `{"near":{"slant_deg":0,"tilt":1},"far":{"slant_deg":0}}`, "unknown_field", "near.tilt"},
		{"missing field", "polarization.loss", `{"near":{"slant_deg":0}}`, "missing_field", "far"},
		{"text for a number", "polarization.loss", `{"near":{"slant_deg":"NaN"},"far":{"slant_deg":0}}`, "wrong_type", "near.slant_deg"},
		{"NaN", "polarization.loss", `{"near":{"slant_deg":NaN},"far":{"slant_deg":0}}`, "not_finite", "near.slant_deg"},
		{"too large to be a number", "polarization.loss", `{"near":{"slant_deg":1e999},"far":{"slant_deg":0}}`, "not_finite", "near.slant_deg"},
		{"skew of 400 degrees", "polarization.loss", `{"near":{"slant_deg":0,"skew_deg":400},"far":{"slant_deg":0}}`, "out_of_range", "near.skew_deg"},
		{"hand without axial ratio", "polarization.loss", `{"near":{"slant_deg":0,"hand":"left"},"far":{"slant_deg":0}}`, "impossible", "near.hand"},
		{"a list", "polarization.loss", `[]`, "wrong_type", ""},
	} {
		t.Run(row.name, func(t *testing.T) {
			out, p := Reckon(row.op, []byte(row.in))
			if p == nil {
				t.Fatalf("answered %s", out)
			}
			if p.Code != row.code || p.Field != row.field {
				t.Errorf("got %s at %q (%s), want %s at %q", p.Code, p.Field, p.Message, row.code, row.field)
			}
			if out != nil {
				t.Errorf("a problem came with an answer: %s", out)
			}
		})
	}
}

func TestAFaultOfOursBecomesAProblem(t *testing.T) {
	var index []int
	table := []operation{
		{"panics with text", func(*codec.Value) (answer, *Problem) { panic("broken contract") }, nil},
		{"panics at run time", func(*codec.Value) (answer, *Problem) { return codec.Obj(codec.M("x", codec.Int(index[3]))), nil }, nil},
		{"not finite", func(*codec.Value) (answer, *Problem) { return codec.Obj(codec.M("x", codec.Num(math.NaN()))), nil }, nil},
		{"infinite, deep", func(*codec.Value) (answer, *Problem) {
			return codec.Obj(codec.M("x", codec.Seq(codec.Obj(codec.M("y", codec.Num(math.Inf(1))))))), nil
		}, nil},
	}
	for _, o := range table {
		out, p := reckon(table, o.name, []byte(`{}`))
		if p == nil || p.Code != codec.Internal || out != nil {
			t.Errorf("%s: got %s and %v, want the code internal and no answer", o.name, out, p)
		}
	}
}

func TestEveryAnswerCarriesItsMethod(t *testing.T) {
	out, p := Reckon("polarization.loss", []byte(`{"near":{"slant_deg":45},"far":{"slant_deg":-45}}`))
	if p != nil {
		t.Fatal(p)
	}
	const want = `{"factor":1,"loss_db":0,"blind":false,"method":{"version":"` + Version + `","sources":["IEEE Std 145","Balanis, Antenna Theory, ch. 2"]}}`
	if string(out) != want {
		t.Errorf("got %s\nwant %s", out, want)
	}
	for _, o := range operations() {
		if len(o.sources) == 0 {
			t.Errorf("%s names no source", o.name)
		}
	}
}
