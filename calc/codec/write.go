package codec

import (
	"math"
	"strconv"
	"unicode/utf8"
)

// Marshal writes a value as compact JSON, numbers in the shortest form that
// reads back to the same float64. A number that is not finite is a fault of
// ours, never written: the problem names where it stands.
func Marshal(v *Value) ([]byte, *Problem) {
	w := writer{out: make([]byte, 0, 512)}
	w.value(v, "")
	if w.bad != "" {
		return nil, &Problem{Internal, w.bad, "the computation gave a number that is not finite; please report this input"}
	}
	return w.out, nil
}

type writer struct {
	out []byte
	bad string // path of the first number that is not finite
}

func (w *writer) value(v *Value, path string) {
	if v == nil {
		w.out = append(w.out, "null"...)
		return
	}
	switch v.Kind {
	case Null:
		w.out = append(w.out, "null"...)
	case Bool:
		w.out = strconv.AppendBool(w.out, v.Truth)
	case Number:
		if math.IsNaN(v.Num) || math.IsInf(v.Num, 0) {
			if w.bad == "" {
				w.bad = path
			}
			return
		}
		w.out = AppendNumber(w.out, v.Num)
	case Text:
		w.text(v.Str)
	case List:
		w.out = append(w.out, '[')
		for i, item := range v.Items {
			if i > 0 {
				w.out = append(w.out, ',')
			}
			w.value(item, path)
		}
		w.out = append(w.out, ']')
	case Object:
		w.out = append(w.out, '{')
		for i := range v.Members {
			if i > 0 {
				w.out = append(w.out, ',')
			}
			w.text(v.Members[i].Name)
			w.out = append(w.out, ':')
			w.value(v.Members[i].Value, join(path, v.Members[i].Name))
		}
		w.out = append(w.out, '}')
	default:
		panic("codec: value of no kind")
	}
}

// AppendNumber writes a finite number in its shortest form: plain digits
// between 1e-6 and 1e21, an exponent outside, as ECMAScript prints numbers, so
// that the browser and the server show the same digits.
func AppendNumber(out []byte, x float64) []byte {
	if x == 0 {
		return append(out, '0') // also for -0, which is no reading
	}
	if a := math.Abs(x); a < 1e-6 || a >= 1e21 {
		return strconv.AppendFloat(out, x, 'e', -1, 64)
	}
	return strconv.AppendFloat(out, x, 'f', -1, 64)
}

func (w *writer) text(s string) {
	const hex = "0123456789abcdef"
	w.out = append(w.out, '"')
	for i := 0; i < len(s); {
		c := s[i]
		if c >= utf8.RuneSelf {
			r, n := utf8.DecodeRuneInString(s[i:])
			switch {
			case r == utf8.RuneError && n == 1: // not UTF-8: only from a fault of ours
				w.out = append(w.out, `\ufffd`...)
			case r == '\u2028' || r == '\u2029': // line ends in old JavaScript
				w.out = append(w.out, `\u202`...)
				w.out = append(w.out, hex[r&0xf])
			default:
				w.out = append(w.out, s[i:i+n]...)
			}
			i += n
			continue
		}
		switch {
		case c == '"' || c == '\\':
			w.out = append(w.out, '\\', c)
		case c == '\n':
			w.out = append(w.out, '\\', 'n')
		case c == '\t':
			w.out = append(w.out, '\\', 't')
		case c < 0x20 || c == 0x7f || c == '<' || c == '>' || c == '&': // the last three so that JSON in a page stays text
			w.out = append(w.out, '\\', 'u', '0', '0', hex[c>>4], hex[c&0xf])
		default:
			w.out = append(w.out, c)
		}
		i++
	}
	w.out = append(w.out, '"')
}
