package server

import (
	_ "embed"
	"encoding/json/jsontext"
	json "encoding/json/v2"
	"errors"
	"maps"
	"net/http"

	"github.com/gofiber/fiber/v2"

	"crossplumb/calc/wire"
	"crossplumb/calc/wire/schema"
)

// openAPI is written by hand: it is what was agreed, and the tests hold every answer of the server against it.
//
//go:embed openapi.json
var openAPI []byte

// GET /api/openapi.json is the agreement, OpenAPI 3.1, with the schemas of all operations in it.
func (s *Server) showOpenAPI(c *fiber.Ctx) error {
	c.Set(fiber.HeaderContentType, "application/json; charset=utf-8")
	return c.Status(http.StatusOK).Send(s.openAPI)
}

// describe puts the operations into the document: each has its own address and its own schemas, and the mount sheet and
// the verdict stand for what mount.verdict takes and gives.
func describe(text []byte) ([]byte, error) {
	var doc struct {
		OpenAPI    string                               `json:"openapi"`
		Info       jsontext.Value                       `json:"info"`
		Dialect    string                               `json:"jsonSchemaDialect"`
		Paths      map[string]map[string]map[string]any `json:"paths"`
		Components struct {
			SecuritySchemes jsontext.Value `json:"securitySchemes"`
			Schemas         map[string]any `json:"schemas"`
		} `json:"components"`
	}
	if err := json.Unmarshal(text, &doc, json.RejectUnknownMembers(true)); err != nil {
		return nil, err
	}
	general := doc.Paths["/api/calc/{op}"]["post"]
	if general == nil {
		return nil, errors.New("openapi.json has no POST /api/calc/{op}")
	}
	refer := func(name string) map[string]any { return map[string]any{"$ref": "#/components/schemas/" + name} }
	media := func(schema any) map[string]any {
		return map[string]any{"application/json": map[string]any{"schema": schema}}
	}
	for _, op := range wire.Operations() {
		in, out := schema.For(op)
		doc.Components.Schemas[op+".in"], doc.Components.Schemas[op+".out"] = jsontext.Value(in), jsontext.Value(out)
		own := maps.Clone(general)
		own["operationId"], own["summary"] = op, "Run "+op
		own["requestBody"] = map[string]any{"required": true, "content": media(refer(op + ".in"))}
		responses := maps.Clone(general["responses"].(map[string]any))
		responses["200"] = map[string]any{"description": "The answer.", "content": media(refer(op + ".out"))}
		own["responses"] = responses
		// Of the general address's parameters the name of the operation is none here.
		var parameters []any
		for _, p := range general["parameters"].([]any) {
			if p.(map[string]any)["in"] != "path" {
				parameters = append(parameters, p)
			}
		}
		own["parameters"] = parameters
		doc.Paths["/api/calc/"+op] = map[string]map[string]any{"post": own}
	}
	doc.Components.Schemas["MountSheet"] = refer("mount.verdict.in")
	doc.Components.Schemas["Verdict"] = refer("mount.verdict.out")
	return json.Marshal(doc, json.Deterministic(true))
}
