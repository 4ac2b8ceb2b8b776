package server

import (
	"encoding/json/jsontext"
	json "encoding/json/v2"
	"errors"
	"net/http"
	"strconv"
	"strings"

	"github.com/gofiber/fiber/v2"
)

// decode reads a request's body into a struct: JSON with exactly the names of the struct, each once, valid UTF-8. What
// must be there is a pointer or a jsontext.Value in the struct, and the handler says so.
func decode(c *fiber.Ctx, limit int, into any) error {
	body := c.BodyRaw()
	if len(body) > limit {
		return refused(http.StatusRequestEntityTooLarge, "too_large",
			"the request is larger than "+strconv.Itoa(limit>>10)+" KiB")
	}
	err := json.Unmarshal(body, into, json.RejectUnknownMembers(true))
	if err == nil {
		return nil
	}
	p := refused(http.StatusBadRequest, "malformed", "the request is not the JSON that this address takes")
	var semantic *json.SemanticError
	var syntactic *jsontext.SyntacticError
	switch {
	case errors.Is(err, json.ErrUnknownName):
		p.Code, p.Detail = "unknown_field", "the request has a field that this address does not know"
		if errors.As(err, &semantic) {
			p.Field = fieldPath(semantic.JSONPointer)
		}
	case errors.As(err, &semantic):
		p.Code, p.Field, p.Detail = "wrong_type", fieldPath(semantic.JSONPointer), "this field has another type than it must have"
	case errors.As(err, &syntactic) && errors.Is(err, jsontext.ErrDuplicateName):
		p.Field, p.Detail = fieldPath(syntactic.JSONPointer), "the request has this field twice"
	}
	return p
}

// fieldPath writes /entries/0/raw as entries[0].raw.
func fieldPath(pointer jsontext.Pointer) string {
	var b strings.Builder
	for token := range pointer.Tokens() {
		if _, err := strconv.Atoi(token); err == nil {
			b.WriteString("[" + token + "]")
			continue
		}
		if b.Len() > 0 {
			b.WriteByte('.')
		}
		b.WriteString(token)
	}
	return b.String()
}

func missing(field string) *problem {
	return &problem{Status: http.StatusBadRequest, Code: "missing_field", Field: field, Detail: "this field must be there"}
}

func outOfRange(field, detail string) *problem {
	return &problem{Status: http.StatusBadRequest, Code: "out_of_range", Field: field, Detail: detail}
}

// knownQuery refuses parameters that the address does not know: a misspelt one would be ignored in silence.
func knownQuery(c *fiber.Ctx, names ...string) error {
	var err error
	c.Request().URI().QueryArgs().VisitAll(func(key, _ []byte) {
		for _, name := range names {
			if string(key) == name {
				return
			}
		}
		err = &problem{Status: http.StatusBadRequest, Code: "unknown_field", Field: string(key), Detail: "this address does not know this parameter"}
	})
	return err
}

// wholeNumber reads a parameter.
func wholeNumber(c *fiber.Ctx, name string, absent, least, most int64) (int64, error) {
	text := c.Query(name)
	if text == "" {
		return absent, nil
	}
	n, err := strconv.ParseInt(text, 10, 64)
	if err != nil || n < least || n > most {
		return 0, outOfRange(name, "a whole number from "+strconv.FormatInt(least, 10)+" to "+strconv.FormatInt(most, 10))
	}
	return n, nil
}

// answer writes a JSON answer.
func answer(c *fiber.Ctx, status int, body any) error {
	text, err := json.Marshal(body, json.Deterministic(true))
	if err != nil {
		return err
	}
	c.Set(fiber.HeaderContentType, "application/json; charset=utf-8")
	return c.Status(status).Send(text)
}
