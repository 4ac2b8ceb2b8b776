package codec

// The codes of a problem. They are part of the door: programs branch on them,
// so they never change meaning.
const (
	UnknownOperation = "unknown_operation"
	Malformed        = "malformed"     // not JSON, or a name twice in one object
	UnknownField     = "unknown_field" // a name that the operation does not know
	MissingField     = "missing_field"
	WrongType        = "wrong_type"
	OutOfRange       = "out_of_range"
	NotFinite        = "not_finite"
	Impossible       = "impossible"   // each field is possible, together they are not
	NotModelled      = "not_modelled" // possible, but outside what the formulas hold for
	TooLarge         = "too_large"
	Internal         = "internal" // a fault of ours
)

// Problem is an input that cannot be answered: what is wrong, where, and what
// to change. It is an answer to a person, not a fault of the program.
type Problem struct {
	Code    string // one of the constants above
	Field   string // path like near.antennas[1].skew.as_left[0].value; empty for the whole
	Message string // one English sentence that says what to change
}

// Error makes a Problem usable as an error.
func (p *Problem) Error() string {
	if p.Field == "" {
		return p.Code + ": " + p.Message
	}
	return p.Code + ": " + p.Field + ": " + p.Message
}

// JSON is the problem as it goes out: {"code","field","message"}.
func (p *Problem) JSON() []byte {
	out, _ := Marshal(Obj(M("code", Str(p.Code)), M("field", Str(p.Field)), M("message", Str(p.Message))))
	return out
}

// Refuse makes a problem about the value, with its path.
func (v *Value) Refuse(code, message string) *Problem {
	return &Problem{Code: code, Field: v.Path(), Message: message}
}
