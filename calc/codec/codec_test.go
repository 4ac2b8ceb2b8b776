package codec_test

import (
	"encoding/json"
	"math"
	"reflect"
	"strings"
	"testing"

	"pgregory.net/rapid"

	"crossplumb/calc/codec"
)

func TestParseRefuses(t *testing.T) {
	deep := strings.Repeat("[", 40) + strings.Repeat("]", 40)
	for _, row := range []struct{ name, in, code, field string }{
		{"nothing", ``, codec.Malformed, ""},
		{"open object", `{"a":1`, codec.Malformed, ""},
		{"open list", `{"a":[1,2`, codec.Malformed, "a"},
		{"open text", `{"a":"x`, codec.Malformed, "a"},
		{"trailing comma", `{"a":1,}`, codec.Malformed, ""},
		{"trailing text", `1 2`, codec.Malformed, ""},
		{"single quotes", `{'a':1}`, codec.Malformed, ""},
		{"name twice", `{"a":{"b":1,"b":1}}`, codec.Malformed, "a.b"},
		{"name twice by escape", `{"b":1,"\u0062":1}`, codec.Malformed, "b"},
		{"NaN", `{"a":[0,NaN]}`, codec.NotFinite, "a[1]"},
		{"minus infinity", `{"a":-Infinity}`, codec.NotFinite, "a"},
		{"huge", `{"a":1e400}`, codec.NotFinite, "a"},
		{"leading zero", `{"a":012}`, codec.Malformed, "a"},
		{"comma as decimal sign", `{"a":6,2}`, codec.Malformed, ""},
		{"plus sign", `{"a":+1}`, codec.Malformed, "a"},
		{"bare point", `{"a":1.}`, codec.Malformed, "a"},
		{"hexadecimal", `{"a":0x10}`, codec.Malformed, ""},
		{"too deep", deep, codec.TooLarge, strings.Repeat("[0]", 33)},
		{"too long", `"` + strings.Repeat("x", codec.MaxBytes) + `"`, codec.TooLarge, ""},
		{"not UTF-8", "\"\xff\"", codec.Malformed, ""},
		{"half a pair", `"\ud800"`, codec.Malformed, ""},
		{"control character", "\"\n\"", codec.Malformed, ""},
		{"no such escape", `"\x"`, codec.Malformed, ""},
		{"signed escape", `"\u+123"`, codec.Malformed, ""},
	} {
		t.Run(row.name, func(t *testing.T) {
			v, p := codec.Parse([]byte(row.in))
			if p == nil {
				t.Fatalf("read %+v", v)
			}
			if p.Code != row.code || p.Field != row.field || p.Message == "" {
				t.Errorf("got %s at %q: %s; want %s at %q", p.Code, p.Field, p.Message, row.code, row.field)
			}
		})
	}
}

func TestPathsNameTheField(t *testing.T) {
	v, p := codec.Parse([]byte(`{"near":{"antennas":[{},{"skew":{"as_left":[{"value":6.2}]}}]}}`))
	if p != nil {
		t.Fatal(p)
	}
	leaf := v.Get("near").Get("antennas").Items[1].Get("skew").Get("as_left").Items[0].Get("value")
	if got := leaf.Path(); got != "near.antennas[1].skew.as_left[0].value" {
		t.Errorf("path %q", got)
	}
}

// plain turns a value into what encoding/json would have made of it.
func plain(v *codec.Value) any {
	switch v.Kind {
	case codec.Bool:
		return v.Truth
	case codec.Number:
		return v.Num
	case codec.Text:
		return v.Str
	case codec.List:
		out := []any{}
		for _, item := range v.Items {
			out = append(out, plain(item))
		}
		return out
	case codec.Object:
		out := map[string]any{}
		for _, m := range v.Members {
			out[m.Name] = plain(m.Value)
		}
		return out
	}
	return nil
}

// TestReadsAndWritesLikeTheStandardLibrary compares with encoding/json, an
// independent implementation, on arbitrary documents, both ways.
func TestReadsAndWritesLikeTheStandardLibrary(t *testing.T) {
	leaf := rapid.OneOf(
		rapid.Just[any](nil), rapid.Map(rapid.Bool(), func(b bool) any { return b }),
		rapid.Map(rapid.Float64(), func(x float64) any {
			if math.IsNaN(x) || math.IsInf(x, 0) || x == 0 {
				return 0.0
			}
			return x
		}),
		rapid.Map(rapid.String(), func(s string) any { return strings.ToValidUTF8(s, "?") }),
	)
	var tree func(depth int) *rapid.Generator[any]
	tree = func(depth int) *rapid.Generator[any] {
		if depth == 0 {
			return leaf
		}
		return rapid.OneOf(leaf,
			rapid.Map(rapid.SliceOfN(tree(depth-1), 0, 4), func(s []any) any {
				if s == nil {
					return []any{}
				}
				return s
			}),
			rapid.Map(rapid.MapOfN(rapid.Map(rapid.String(), func(s string) string { return strings.ToValidUTF8(s, "?") }), tree(depth-1), 0, 40), func(m map[string]any) any {
				if m == nil {
					return map[string]any{}
				}
				return m
			}),
		)
	}
	rapid.Check(t, func(t *rapid.T) {
		want := tree(3).Draw(t, "document")
		in, err := json.Marshal(want)
		if err != nil {
			t.Fatal(err)
		}
		v, p := codec.Parse(in)
		if p != nil {
			t.Fatalf("refused %s: %v", in, p)
		}
		if got := plain(v); !reflect.DeepEqual(got, want) {
			t.Fatalf("read %#v, want %#v", got, want)
		}
		out, p := codec.Marshal(v)
		if p != nil {
			t.Fatal(p)
		}
		var back any
		if err := json.Unmarshal(out, &back); err != nil {
			t.Fatalf("wrote %s: %v", out, err)
		}
		if !reflect.DeepEqual(back, want) {
			t.Fatalf("wrote %s, which reads as %#v, want %#v", out, back, want)
		}
	})
}

func TestParseAgreesWithTheStandardLibraryOnWhatIsJSON(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		in := []byte(rapid.StringMatching(`[\[\]{}",:0-9eE.+\-nultrfalsNI \\u]{0,20}`).Draw(t, "in"))
		_, p := codec.Parse(in)
		if p == nil && !json.Valid(in) {
			t.Fatalf("read %q, which is not JSON", in)
		}
		if p != nil && json.Valid(in) && p.Code == codec.Malformed && !strings.Contains(p.Message, "twice") && !strings.Contains(p.Message, "surrogate") {
			t.Fatalf("refused %q: %v", in, p)
		}
	})
}

func TestWriterNamesWhatIsNotFinite(t *testing.T) {
	for _, x := range []float64{math.NaN(), math.Inf(1), math.Inf(-1)} {
		out, p := codec.Marshal(codec.Obj(codec.M("a", codec.Obj(codec.M("b", codec.Num(x))))))
		if out != nil || p == nil || p.Code != codec.Internal || p.Field != "a.b" {
			t.Errorf("%v: wrote %s, problem %v", x, out, p)
		}
	}
}

func TestNumbersAreShort(t *testing.T) {
	for x, want := range map[float64]string{0.1: "0.1", 1e21: "1e+21", 1e20: "100000000000000000000", 1e-7: "1e-07", 1e-6: "0.000001", -3: "-3", math.Copysign(0, -1): "0"} {
		if got := string(codec.AppendNumber(nil, x)); got != want {
			t.Errorf("%v: %s, want %s", x, got, want)
		}
	}
}

func TestFields(t *testing.T) {
	read := func(in string) *codec.Problem {
		v, p := codec.Parse([]byte(in))
		if p != nil {
			t.Fatal(p)
		}
		f := codec.Open(v)
		f.Number("n", codec.Between(0, 10))
		f.MaybeChoice("c", "left", "right")
		f.TruthOr("b", true)
		for _, item := range f.OneOrMany("r", 2) {
			g := codec.Open(item)
			g.Text("t")
			f.Fail(g.Done())
		}
		return f.Done()
	}
	for _, row := range []struct{ in, code, field string }{
		{`{"n":1}`, "", ""},
		{`{"n":1,"c":null,"b":null,"r":null}`, "", ""},
		{`{"n":1,"r":{"t":"x"}}`, "", ""},
		{`{"n":1,"r":[{"t":"x"},{"t":"y"}]}`, "", ""},
		{`{"n":1,"r":[{"t":"x"},{"t":"y"},{"t":"z"}]}`, codec.TooLarge, "r"},
		{`{"n":1,"r":[{"t":"x"},{"t":3}]}`, codec.WrongType, "r[1].t"},
		{`{}`, codec.MissingField, "n"},
		{`{"n":null}`, codec.MissingField, "n"},
		{`{"n":"1"}`, codec.WrongType, "n"},
		{`{"n":11}`, codec.OutOfRange, "n"},
		{`{"n":1,"c":"up"}`, codec.OutOfRange, "c"},
		{`{"n":1,"b":1}`, codec.WrongType, "b"},
		{`{"n":1,"m":1}`, codec.UnknownField, "m"},
		{`[1]`, codec.WrongType, ""},
	} {
		p := read(row.in)
		switch {
		case p == nil && row.code != "":
			t.Errorf("%s: read, want %s", row.in, row.code)
		case p != nil && (p.Code != row.code || p.Field != row.field):
			t.Errorf("%s: %v, want %s at %q", row.in, p, row.code, row.field)
		}
	}
}

func FuzzParse(f *testing.F) {
	for _, s := range []string{`{"a":[1,2.5e-3,"x\u00e9\ud83d\ude00",null,true,false,{}]}`, `[[[[]]]]`, `-0.0e+9`, `"\u2028"`, `{"a":1,"a":2}`} {
		f.Add([]byte(s))
	}
	f.Fuzz(func(t *testing.T, in []byte) {
		v, p := codec.Parse(in)
		if p != nil {
			return
		}
		out, p := codec.Marshal(v)
		if p != nil {
			t.Fatalf("read but not written: %v", p)
		}
		again, p := codec.Parse(out)
		if p != nil {
			t.Fatalf("wrote %s, which is refused: %v", out, p)
		}
		if !reflect.DeepEqual(plain(v), plain(again)) {
			t.Fatalf("%s became %s", in, out)
		}
	})
}
