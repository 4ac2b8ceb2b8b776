package sheet

import "crossplumb/calc/codec"

// survey is what entries add to a sheet beside readings of antennas: the figures of
// the radios and the obstacles of the path.
type survey struct {
	length     float64 // of the path, m
	planned    int     // obstacles that the sheet has already
	controlOff bool
	pages      map[string][]line // of the radios, by end, in the order they were read
	obstacles  []line
}

func openSurvey(doc *codec.Value) survey {
	s := survey{pages: map[string][]line{}}
	if d := doc.Get("path").Get("distance_m"); d != nil && d.Kind == codec.Number {
		s.length = d.Num
	}
	if o := doc.Get("path").Get("obstacles"); o != nil {
		s.planned = len(o.Items)
	}
	return s
}

// figure takes the page of one end's radio. What stands in it is calc/fault's to
// read: a slip in one figure must not take the verdict away.
func (s *survey) figure(item, body *codec.Value, id string) *codec.Problem {
	if body == nil {
		return item.Refuse(codec.MissingField, "radio figures need their body")
	}
	f := codec.Open(body)
	end := f.Choice("end", "near", "far")
	page := f.Child("page")
	if page != nil {
		page = page.Free()
	}
	if typed := f.Maybe("typed"); typed != nil {
		typed.Free() // as it stood on the screen, for people
	}
	if p := f.Done(); p != nil {
		return p
	}
	if page.Kind != codec.Object {
		return page.Refuse(codec.WrongType, "must be an object, the figures of one radio's page")
	}
	s.pages[end] = append(s.pages[end], line{id, page})
	return nil
}

func (s *survey) note(item, body *codec.Value, id string) *codec.Problem {
	if body == nil {
		return item.Refuse(codec.MissingField, "an obstacle needs its body")
	}
	// One that is no obstacle of this path, and the one that is too many, are passed
	// over: what stands in the path must not take the verdict on the mount away.
	if _, p := readObstacle(body, s.length); p != nil || s.planned+len(s.obstacles) >= MaxObstacles {
		return nil
	}
	s.obstacles = append(s.obstacles, line{id, body})
	return nil
}

func (s *survey) withdraw(id string) {
	for end := range s.pages {
		s.pages[end] = without(s.pages[end], id)
	}
	s.obstacles = without(s.obstacles, id)
}

func without(lines []line, id string) []line {
	var out []line
	for _, l := range lines {
		if l.entry != id {
			out = append(out, l)
		}
	}
	return out
}

// close writes into a copy of the document what entries added; a sheet without such
// entries stays as it is.
func (s *survey) close(doc *codec.Value) {
	figures := codec.Obj()
	if there := doc.Get("radio_figures"); there != nil && there.Kind == codec.Object {
		figures = copyOf(there)
	}
	any := false
	for _, end := range []string{"near", "far"} {
		if pages := s.pages[end]; len(pages) > 0 {
			figures.Set(end, pages[len(pages)-1].reading)
			any = true
		}
	}
	if s.controlOff && len(figures.Members) > 0 {
		figures.Set("power_control_off", codec.Truth(true))
		any = true
	}
	if any {
		doc.Set("radio_figures", figures)
	}
	if len(s.obstacles) > 0 {
		path := copyOf(doc.Get("path"))
		list := codec.Seq()
		if there := path.Get("obstacles"); there != nil && there.Kind == codec.List {
			list.Items = append(list.Items, there.Items...)
		}
		for _, o := range s.obstacles {
			list.Items = append(list.Items, o.reading)
		}
		path.Set("obstacles", list)
		doc.Set("path", path)
	}
}
