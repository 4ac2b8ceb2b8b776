package server

import (
	json "encoding/json/v2"
	"fmt"
	"math"
	"net/http"
	"regexp"
	"slices"
	"strings"
	"sync"
	"testing"
	"time"

	"github.com/google/uuid"

	"crossplumb/calc/wire"
)

var agreement = sync.OnceValue(func() map[string]any {
	var doc map[string]any
	if err := json.Unmarshal(openAPI, &doc); err != nil {
		panic(err)
	}
	return doc
})

// inAgreement finds the description of a request's address: a template of openapi.json and its operation.
func inAgreement(method, path string) (template string, operation map[string]any) {
	path, _, _ = strings.Cut(path, "?")
	parts := strings.Split(path, "/")
	best := -1
	for candidate, item := range agreement()["paths"].(map[string]any) {
		wanted := strings.Split(candidate, "/")
		if len(wanted) != len(parts) {
			continue
		}
		literal, fits := 0, true
		for i := range parts {
			switch {
			case wanted[i] == parts[i]:
				literal++
			case !strings.HasPrefix(wanted[i], "{"):
				fits = false
			}
		}
		if !fits || literal <= best {
			continue
		}
		best = literal
		template = candidate
		operation, _ = item.(map[string]any)[strings.ToLower(method)].(map[string]any)
	}
	return template, operation
}

// asAgreed holds an answer of the API against what openapi.json says of it.
func (s *site) asAgreed(c call, a answered) {
	s.Helper()
	if !strings.HasPrefix(c.path, "/api") && !strings.HasPrefix(c.path, "/healthz") || c.method == http.MethodHead {
		return
	}
	where := c.method + " " + c.path
	template, operation := inAgreement(c.method, c.path)
	kind := a.header.Get("Content-Type")
	if operation == nil {
		// No such address or method: the answer must be a problem all the same.
		if kind != "application/problem+json" || a.status < 400 {
			s.Errorf("%s is not in openapi.json and answers %d %s", where, a.status, kind)
		}
		return
	}
	response, described := operation["responses"].(map[string]any)[fmt.Sprint(a.status)].(map[string]any)
	if !described {
		s.Errorf("%s answers %d, which openapi.json does not have for %s: %s", where, a.status, template, clip(a.body))
		return
	}
	content, _ := response["content"].(map[string]any)
	if content == nil {
		if a.body != "" {
			s.Errorf("%s answers %d with a body, openapi.json has none", where, a.status)
		}
		return
	}
	plain, _, _ := strings.Cut(kind, ";")
	media, described := content[plain].(map[string]any)
	if !described {
		s.Errorf("%s answers %d as %q, which openapi.json does not have", where, a.status, kind)
		return
	}
	var value any
	if err := json.Unmarshal([]byte(a.body), &value); err != nil {
		s.Errorf("%s answers %d with what is no JSON: %v", where, a.status, err)
		return
	}
	for _, wrong := range against(media["schema"], value, "") {
		s.Errorf("%s answers %d: %s", where, a.status, wrong)
	}
}

// against checks a value against a schema, as far as openapi.json uses JSON Schema. A keyword that it does not know is
// itself an error: nothing is passed over in silence.
func against(schema, value any, at string) (wrong []string) {
	rules, is := schema.(map[string]any)
	if !is {
		return []string{at + ": the schema is no object"}
	}
	fail := func(format string, args ...any) { wrong = append(wrong, "at "+at+": "+fmt.Sprintf(format, args...)) }
	for keyword, rule := range rules {
		switch keyword {
		case "description", "required", "additionalProperties", "x-role":
		case "$ref":
			name := strings.TrimPrefix(rule.(string), "#/components/schemas/")
			target, there := agreement()["components"].(map[string]any)["schemas"].(map[string]any)[name]
			if !there {
				fail("no schema %s", name)
				continue
			}
			wrong = append(wrong, against(target, value, at)...)
		case "type":
			names, several := rule.([]any)
			if !several {
				names = []any{rule}
			}
			if !slices.ContainsFunc(names, func(n any) bool { return isA(n.(string), value) }) {
				fail("%v is not a %v", value, rule)
			}
		case "const":
			if value != rule {
				fail("%v is not %v", value, rule)
			}
		case "enum":
			if !slices.Contains(rule.([]any), value) {
				fail("%v is none of %v", value, rule)
			}
		case "minimum", "maximum":
			if n, is := value.(float64); is && (keyword == "minimum" && n < rule.(float64) || keyword == "maximum" && n > rule.(float64)) {
				fail("%v is beyond the %s %v", n, keyword, rule)
			}
		case "minLength":
			if text, is := value.(string); is && float64(len(text)) < rule.(float64) {
				fail("%q is too short", text)
			}
		case "pattern":
			if text, is := value.(string); is && !regexp.MustCompile(rule.(string)).MatchString(text) {
				fail("%q is not like %s", text, rule)
			}
		case "format":
			if text, is := value.(string); is && !formed(rule.(string), text) {
				fail("%q is not a %s", text, rule)
			}
		case "minItems", "maxItems":
			if list, is := value.([]any); is && (keyword == "minItems" && float64(len(list)) < rule.(float64) || keyword == "maxItems" && float64(len(list)) > rule.(float64)) {
				fail("%d items", len(list))
			}
		case "items":
			list, _ := value.([]any)
			for i, item := range list {
				wrong = append(wrong, against(rule, item, fmt.Sprintf("%s[%d]", at, i))...)
			}
		case "oneOf":
			fits := 0
			for _, one := range rule.([]any) {
				if len(against(one, value, at)) == 0 {
					fits++
				}
			}
			if fits != 1 {
				fail("it fits %d of the schemas it is to fit one of", fits)
			}
		case "properties":
		default:
			fail("this test does not know the keyword %s", keyword)
		}
	}
	object, is := value.(map[string]any)
	if !is {
		return wrong
	}
	required, _ := rules["required"].([]any)
	for _, name := range required {
		if _, there := object[name.(string)]; !there {
			fail("%s is missing", name)
		}
	}
	properties, _ := rules["properties"].(map[string]any)
	for name, inner := range object {
		if rule, known := properties[name]; known {
			wrong = append(wrong, against(rule, inner, at+"."+name)...)
			continue
		}
		switch rule := rules["additionalProperties"].(type) {
		case bool:
			if !rule {
				fail("%s is not agreed", name)
			}
		case map[string]any:
			wrong = append(wrong, against(rule, inner, at+"."+name)...)
		}
	}
	return wrong
}

func isA(kind string, value any) bool {
	switch v := value.(type) {
	case nil:
		return kind == "null"
	case bool:
		return kind == "boolean"
	case string:
		return kind == "string"
	case float64:
		return kind == "number" || kind == "integer" && v == math.Trunc(v)
	case []any:
		return kind == "array"
	case map[string]any:
		return kind == "object"
	}
	return false
}

func formed(format, text string) bool {
	var err error
	switch format {
	case "date-time":
		_, err = time.Parse(time.RFC3339, text)
	case "date":
		_, err = time.Parse(time.DateOnly, text)
	case "uuid":
		_, err = uuid.Parse(text)
	default:
		return false
	}
	return err == nil
}

// A check of the checker: it must see what is wrong.
func TestTheAgreementIsHeldAgainstAnswers(t *testing.T) {
	schema := map[string]any{"$ref": "#/components/schemas/Head"}
	for text, fine := range map[string]bool{
		`{"seq":0,"hash":""}`: true, `{"seq":3,"hash":"` + strings.Repeat("a", 64) + `"}`: true,
		`{"seq":-1,"hash":""}`: false, `{"seq":1.5,"hash":""}`: false, `{"seq":0}`: false, `{"seq":0,"hash":"","more":1}`: false,
		`{"seq":"0","hash":""}`: false, `{"seq":0,"hash":"zz"}`: false, `[]`: false, `null`: false,
	} {
		var value any
		if err := json.Unmarshal([]byte(text), &value); err != nil {
			t.Fatal(err)
		}
		if wrong := against(schema, value, ""); (len(wrong) == 0) != fine {
			t.Errorf("%s: %v", text, wrong)
		}
	}
	if len(against(map[string]any{"multipleOf": 2.0}, 1.0, "")) == 0 {
		t.Error("an unknown keyword is passed over")
	}
}

// Every route is described, and everything described is a route.
func TestEveryRouteIsInTheAgreement(t *testing.T) {
	s := openSite(t)
	described := map[string]bool{}
	for path, item := range agreement()["paths"].(map[string]any) {
		for method := range item.(map[string]any) {
			described[strings.ToUpper(method)+" "+path] = false
		}
	}
	for _, r := range s.server.Routes() {
		if !strings.HasPrefix(r.Path, "/api") && r.Path != "/healthz" {
			continue // pages are files, not the API
		}
		key := r.Method + " " + regexp.MustCompile(`:(\w+)`).ReplaceAllString(r.Path, "{$1}")
		if _, there := described[key]; !there {
			t.Errorf("%s is not in openapi.json", key)
		}
		described[key] = true
	}
	for key, found := range described {
		if !found {
			t.Errorf("%s is in openapi.json and is no route", key)
		}
	}
}

func TestTheAgreementIsServed(t *testing.T) {
	s := openSite(t)
	a := s.do(call{method: "GET", path: "/api/openapi.json", cookie: s.cookie(s.tam), status: 200})
	var doc struct {
		OpenAPI    string         `json:"openapi"`
		Paths      map[string]any `json:"paths"`
		Components struct {
			Schemas map[string]any `json:"schemas"`
		} `json:"components"`
	}
	a.into(t, &doc)
	if doc.OpenAPI != "3.1.0" {
		t.Errorf("openapi %q", doc.OpenAPI)
	}
	for path := range agreement()["paths"].(map[string]any) {
		if doc.Paths[path] == nil {
			t.Errorf("%s was lost", path)
		}
	}
	for _, op := range wire.Operations() {
		if doc.Paths["/api/calc/"+op] == nil {
			t.Errorf("no address for %s", op)
		}
		var one struct {
			Operation string
			In, Out   map[string]any
		}
		s.do(call{method: "GET", path: "/api/calc/" + op + "/schema", cookie: s.cookie(s.tam), status: 200}).into(t, &one)
		if one.Operation != op || one.In["type"] != "object" || one.Out["type"] != "object" {
			t.Errorf("the schema of %s is %v", op, one)
		}
	}
	// Every reference leads somewhere.
	for _, found := range regexp.MustCompile(`"\$ref":"([^"]+)"`).FindAllStringSubmatch(a.body, -1) {
		if name := strings.TrimPrefix(found[1], "#/components/schemas/"); doc.Components.Schemas[name] == nil {
			t.Errorf("%s leads nowhere", found[1])
		}
	}
}
