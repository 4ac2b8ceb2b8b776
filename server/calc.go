package server

import (
	"net/http"
	"net/url"
	"slices"

	"github.com/gofiber/fiber/v2"

	"crossplumb/calc/wire"
	"crossplumb/calc/wire/schema"
)

// GET /api/calc lists the operations.
func (s *Server) listOperations(c *fiber.Ctx) error {
	return answer(c, http.StatusOK, map[string][]string{"operations": wire.Operations()})
}

// operation is the :op of the address, decoded; addresses arrive as they were sent.
func operation(c *fiber.Ctx) (string, error) {
	op, err := url.PathUnescape(c.Params("op"))
	if err != nil || !slices.Contains(wire.Operations(), op) {
		return "", &problem{Status: http.StatusNotFound, Code: "unknown_operation", Detail: "there is no operation of this name; GET /api/calc lists them"}
	}
	return op, nil
}

// POST /api/calc/:op reckons. What cannot be answered is a 422 with the field and what to change.
func (s *Server) calculate(c *fiber.Ctx) error {
	op, err := operation(c)
	if err != nil {
		return err
	}
	body := c.BodyRaw()
	if len(body) > maxCalcBody {
		return refused(http.StatusRequestEntityTooLarge, "too_large", "a calculation takes 1 MiB at most")
	}
	out, refusal := wire.Reckon(op, body)
	if refusal != nil {
		if refusal.Code == "internal" {
			return &problem{Status: http.StatusInternalServerError, Code: refusal.Code, Field: refusal.Field, Detail: refusal.Message}
		}
		return refusal
	}
	c.Set(fiber.HeaderContentType, "application/json; charset=utf-8")
	return c.Status(http.StatusOK).Send(out)
}

// GET /api/calc/:op/schema is what an operation takes and gives, as JSON Schema.
func (s *Server) showSchema(c *fiber.Ctx) error {
	op, err := operation(c)
	if err != nil {
		return err
	}
	in, out := schema.For(op)
	return answer(c, http.StatusOK, map[string]any{"operation": op, "in": rawJSON(in), "out": rawJSON(out)})
}
