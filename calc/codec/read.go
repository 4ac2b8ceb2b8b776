package codec

import (
	"math"
	"strconv"
	"unicode/utf16"
	"unicode/utf8"
)

// MaxBytes is the largest document that is read. The largest honest one is a
// mount sheet with sampled pattern cuts for eight antennas at both ends, about
// 0.4 MB; the phone must not be made to parse more than a few of these.
const MaxBytes = 2 << 20

// MaxDepth is how deep lists and objects may nest. A mount sheet needs 9.
const MaxDepth = 32

// Parse reads one JSON document (RFC 8259). Beyond the grammar it refuses a name
// that stands twice in one object, anything behind the document, numbers that
// do not fit a float64, text that is not valid UTF-8, nesting deeper than
// MaxDepth and documents longer than MaxBytes.
func Parse(in []byte) (*Value, *Problem) {
	if len(in) > MaxBytes {
		return nil, &Problem{TooLarge, "", "the input is longer than 2 MiB; send one mount at a time"}
	}
	r := reader{in: in}
	v, p := r.value(nil, "", 0, 0)
	if p != nil {
		return nil, p
	}
	r.space()
	if r.at < len(r.in) {
		return nil, r.malformed(nil, "something follows the end of the document")
	}
	return v, nil
}

type reader struct {
	in []byte
	at int
}

func (r *reader) malformed(v *Value, what string) *Problem {
	return &Problem{Malformed, v.Path(), "not valid JSON at byte " + strconv.Itoa(r.at) + ": " + what}
}

func (r *reader) space() {
	for r.at < len(r.in) {
		switch r.in[r.at] {
		case ' ', '\t', '\n', '\r':
			r.at++
		default:
			return
		}
	}
}

func (r *reader) value(parent *Value, key string, index, depth int) (*Value, *Problem) {
	v := &Value{parent: parent, key: key, index: index}
	if depth > MaxDepth {
		return nil, v.Refuse(TooLarge, "the input nests deeper than 32 levels")
	}
	r.space()
	if r.at >= len(r.in) {
		return nil, r.malformed(v, "the document ends too early")
	}
	switch c := r.in[r.at]; {
	case c == '{':
		return r.object(v, depth)
	case c == '[':
		return r.list(v, depth)
	case c == '"':
		s, p := r.text(v)
		if p != nil {
			return nil, p
		}
		v.Kind, v.Str = Text, s
		return v, nil
	case c == '-' || c >= '0' && c <= '9':
		return r.number(v)
	}
	switch word := r.word(); word {
	case "null":
		v.Kind = Null
	case "true":
		v.Kind, v.Truth = Bool, true
	case "false":
		v.Kind = Bool
	case "NaN", "Infinity", "Inf", "nan", "inf":
		return nil, v.Refuse(NotFinite, "must be a finite number; leave the reading out where there is none")
	default:
		return nil, r.malformed(v, "a value is expected here")
	}
	return v, nil
}

func (r *reader) word() string {
	from := r.at
	for r.at < len(r.in) && (r.in[r.at]|0x20) >= 'a' && (r.in[r.at]|0x20) <= 'z' {
		r.at++
	}
	return string(r.in[from:r.at])
}

func (r *reader) object(v *Value, depth int) (*Value, *Problem) {
	v.Kind = Object
	r.at++
	r.space()
	if r.at < len(r.in) && r.in[r.at] == '}' {
		r.at++
		return v, nil
	}
	var seen map[string]bool // only for wide objects: a scan is quicker for the usual ten names
	for {
		r.space()
		if r.at >= len(r.in) || r.in[r.at] != '"' {
			return nil, r.malformed(v, "a name in quotes is expected here")
		}
		name, p := r.text(v)
		if p != nil {
			return nil, p
		}
		twice := false
		if seen != nil {
			twice = seen[name]
		} else {
			for i := range v.Members {
				twice = twice || v.Members[i].Name == name
			}
		}
		if twice {
			return nil, &Problem{Malformed, join(v.Path(), name), "this name stands twice in one object; keep one"}
		}
		r.space()
		if r.at >= len(r.in) || r.in[r.at] != ':' {
			return nil, r.malformed(v, "a colon is expected here")
		}
		r.at++
		m, p := r.value(v, name, 0, depth+1)
		if p != nil {
			return nil, p
		}
		v.Members = append(v.Members, Member{name, m})
		if seen != nil {
			seen[name] = true
		} else if len(v.Members) == 32 {
			seen = make(map[string]bool)
			for i := range v.Members {
				seen[v.Members[i].Name] = true
			}
		}
		r.space()
		if r.at >= len(r.in) {
			return nil, r.malformed(v, "the object is not closed")
		}
		switch r.in[r.at] {
		case ',':
			r.at++
		case '}':
			r.at++
			return v, nil
		default:
			return nil, r.malformed(v, "a comma or a closing brace is expected here")
		}
	}
}

func (r *reader) list(v *Value, depth int) (*Value, *Problem) {
	v.Kind = List
	r.at++
	r.space()
	if r.at < len(r.in) && r.in[r.at] == ']' {
		r.at++
		return v, nil
	}
	for {
		item, p := r.value(v, "", len(v.Items), depth+1)
		if p != nil {
			return nil, p
		}
		v.Items = append(v.Items, item)
		r.space()
		if r.at >= len(r.in) {
			return nil, r.malformed(v, "the list is not closed")
		}
		switch r.in[r.at] {
		case ',':
			r.at++
		case ']':
			r.at++
			return v, nil
		default:
			return nil, r.malformed(v, "a comma or a closing bracket is expected here")
		}
	}
}

// number reads the grammar of RFC 8259 section 6 before strconv sees it:
// strconv alone would also take hexadecimal, underscores and "Inf".
func (r *reader) number(v *Value) (*Value, *Problem) {
	from := r.at
	if r.in[r.at] == '-' {
		r.at++
	}
	whole := r.digits()
	if whole == 0 {
		if r.word() != "" {
			return nil, v.Refuse(NotFinite, "must be a finite number; leave the reading out where there is none")
		}
		return nil, r.malformed(v, "a digit is expected here")
	}
	if whole > 1 && (r.in[from] == '0' || r.in[from] == '-' && r.in[from+1] == '0') {
		return nil, r.malformed(v, "a number does not begin with 0 and another digit")
	}
	if r.at < len(r.in) && r.in[r.at] == '.' {
		r.at++
		if r.digits() == 0 {
			return nil, r.malformed(v, "a digit is expected after the decimal point")
		}
	}
	if r.at < len(r.in) && (r.in[r.at] == 'e' || r.in[r.at] == 'E') {
		r.at++
		if r.at < len(r.in) && (r.in[r.at] == '+' || r.in[r.at] == '-') {
			r.at++
		}
		if r.digits() == 0 {
			return nil, r.malformed(v, "a digit is expected in the exponent")
		}
	}
	x, err := strconv.ParseFloat(string(r.in[from:r.at]), 64)
	if err != nil || math.IsInf(x, 0) {
		return nil, v.Refuse(NotFinite, "the number is too large to be meant")
	}
	v.Kind, v.Num = Number, x
	return v, nil
}

func (r *reader) digits() int {
	n := 0
	for r.at < len(r.in) && r.in[r.at] >= '0' && r.in[r.at] <= '9' {
		r.at++
		n++
	}
	return n
}

func (r *reader) text(v *Value) (string, *Problem) {
	r.at++ // the opening quote
	from := r.at
	for r.at < len(r.in) && r.in[r.at] != '"' && r.in[r.at] != '\\' && r.in[r.at] >= 0x20 {
		r.at++
	}
	if r.at < len(r.in) && r.in[r.at] == '"' { // no escapes: the usual case
		s := r.in[from:r.at]
		r.at++
		if !utf8.Valid(s) {
			return "", r.malformed(v, "text must be UTF-8")
		}
		return string(s), nil
	}
	s := append([]byte(nil), r.in[from:r.at]...)
	for {
		if r.at >= len(r.in) {
			return "", r.malformed(v, "the text is not closed")
		}
		c := r.in[r.at]
		switch {
		case c == '"':
			r.at++
			if !utf8.Valid(s) {
				return "", r.malformed(v, "text must be UTF-8")
			}
			return string(s), nil
		case c < 0x20:
			return "", r.malformed(v, "a control character stands in a text; write it as an escape")
		case c == '\\':
			r.at++
			var p *Problem
			if s, p = r.escape(v, s); p != nil {
				return "", p
			}
		default:
			s = append(s, c)
			r.at++
		}
	}
}

func (r *reader) escape(v *Value, s []byte) ([]byte, *Problem) {
	if r.at >= len(r.in) {
		return nil, r.malformed(v, "the text is not closed")
	}
	c := r.in[r.at]
	r.at++
	switch c {
	case '"', '\\', '/':
		return append(s, c), nil
	case 'b':
		return append(s, '\b'), nil
	case 'f':
		return append(s, '\f'), nil
	case 'n':
		return append(s, '\n'), nil
	case 'r':
		return append(s, '\r'), nil
	case 't':
		return append(s, '\t'), nil
	case 'u':
		a, ok := r.hex4()
		if !ok {
			return nil, r.malformed(v, "four hexadecimal digits are expected after \\u")
		}
		if utf16.IsSurrogate(a) {
			var b rune
			if r.at+1 < len(r.in) && r.in[r.at] == '\\' && r.in[r.at+1] == 'u' {
				r.at += 2
				b, _ = r.hex4()
			}
			whole := utf16.DecodeRune(a, b)
			if whole == utf8.RuneError {
				return nil, r.malformed(v, "half of a surrogate pair stands alone")
			}
			a = whole
		}
		return utf8.AppendRune(s, a), nil
	}
	return nil, r.malformed(v, "no such escape")
}

func (r *reader) hex4() (rune, bool) {
	if r.at+4 > len(r.in) {
		return 0, false
	}
	n, err := strconv.ParseUint(string(r.in[r.at:r.at+4]), 16, 16)
	for _, c := range r.in[r.at : r.at+4] { // ParseUint takes a sign of its own accord
		if c == '+' || c == '-' || c == '_' {
			return 0, false
		}
	}
	r.at += 4
	return rune(n), err == nil
}
