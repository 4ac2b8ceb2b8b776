package server

import (
	_ "embed"
	json "encoding/json/v2"
	"net/http"

	"github.com/gofiber/fiber/v2"
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

// describe puts the operations' own schemas into the document.
func describe(text []byte) ([]byte, error) {
	var doc map[string]any
	if err := json.Unmarshal(text, &doc); err != nil {
		return nil, err
	}
	return json.Marshal(doc, json.Deterministic(true))
}
