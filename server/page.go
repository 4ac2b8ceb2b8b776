package server

import (
	"net/http"
	"strconv"
	"strings"

	"github.com/gofiber/fiber/v2"
)

// GET /, /desk, /sw.js, /manifest.json and /gen/* send what was built, in the form that the browser asks for. A name
// that was not built is a 404, never a page: a service worker would keep it as the script that it asked for.
func (s *Server) page(c *fiber.Ctx) error {
	file, there := s.cfg.Pages.Get(c.Path())
	if !there {
		if c.Path() == "/" || c.Path() == "/desk" {
			return refused(http.StatusServiceUnavailable, "not_built", "the pages are not in this program; build it with: make build")
		}
		return refused(http.StatusNotFound, "not_found", "there is no such file")
	}
	// Kept for ever where the name holds the content's hash; else asked for each time, or an update is never seen.
	if file.Immutable {
		c.Set(fiber.HeaderCacheControl, "public, max-age=31536000, immutable")
	} else {
		c.Set(fiber.HeaderCacheControl, "no-cache")
	}
	body, encoding, tag := file.Plain, "", file.ETag
	if file.Brotli != nil || file.Gzip != nil {
		c.Set(fiber.HeaderVary, fiber.HeaderAcceptEncoding)
		accepted := acceptedEncodings(c.Get(fiber.HeaderAcceptEncoding))
		switch {
		case file.Brotli != nil && accepted["br"]:
			body, encoding = file.Brotli, "br"
		case file.Gzip != nil && accepted["gzip"]:
			body, encoding = file.Gzip, "gzip"
		}
		if encoding != "" {
			// Other bytes, so another strong tag.
			tag = strings.TrimSuffix(tag, `"`) + "-" + encoding + `"`
		}
	}
	c.Set(fiber.HeaderETag, tag)
	if tagAmong(tag, c.Get(fiber.HeaderIfNoneMatch)) {
		return c.SendStatus(http.StatusNotModified)
	}
	if encoding != "" {
		c.Set(fiber.HeaderContentEncoding, encoding)
	}
	c.Set(fiber.HeaderContentType, file.Type)
	return c.Status(http.StatusOK).Send(body)
}

// acceptedEncodings reads Accept-Encoding (RFC 9110 section 12.5.3): a weight of 0 is a refusal.
func acceptedEncodings(header string) map[string]bool {
	accepted := map[string]bool{}
	for part := range strings.SplitSeq(header, ",") {
		name, parameters, _ := strings.Cut(part, ";")
		weight := 1.0
		if value, found := strings.CutPrefix(strings.TrimSpace(parameters), "q="); found {
			if q, err := strconv.ParseFloat(value, 64); err == nil {
				weight = q
			}
		}
		accepted[strings.ToLower(strings.TrimSpace(name))] = weight > 0
	}
	return accepted
}

// tagAmong reads If-None-Match, which compares weakly (RFC 9110 section 13.1.2).
func tagAmong(tag, header string) bool {
	for one := range strings.SplitSeq(header, ",") {
		one = strings.TrimPrefix(strings.TrimSpace(one), "W/")
		if one == tag || one == "*" {
			return true
		}
	}
	return false
}
