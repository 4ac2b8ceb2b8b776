package sheet

import "crossplumb/calc/codec"

// Fold lays the entries of a log over a sheet, in their order, and returns the
// sheet's document with as_found and as_left filled.
//
//   - reading.taken adds its reading to the phase, antenna and quantity it names;
//     readings are pooled, a new one never replaces an old one.
//   - bolt.moved drops the as-left readings of its antenna and quantity so far:
//     they speak of a place where the antenna no longer is. Until it is read again
//     its as_left is an empty list, so that what was found is not taken for what is
//     there now.
//   - reading.withdrawn takes away the reading whose entry it names, and likewise
//     figures and obstacles.
//   - figures.read puts the page of one end into the radio figures: the last one of
//     each end counts. calc/fault reads what is in them.
//   - power_control.confirmed says in the radio figures that automatic transmit power
//     control is off.
//   - obstacle.noted adds an obstacle to the path.
//
// Entries of any other kind are passed over. The document given is not changed.
func Fold(doc *codec.Value, entries []*codec.Value) (*codec.Value, *codec.Problem) {
	if _, p := Read(doc); p != nil {
		return nil, p
	}
	book := openBook(doc)
	for _, item := range entries {
		f := codec.Open(item)
		kind, id := f.Text("kind"), f.MaybeText("id")
		f.MaybeText("mount")
		body := f.Maybe("body")
		if p := f.Done(); p != nil {
			return nil, p
		}
		var p *codec.Problem
		switch {
		case item.Described():
			body.Free()
		case kind == "reading.taken":
			p = book.take(item, body, id)
		case kind == "reading.withdrawn":
			p = book.withdraw(item, body)
		case kind == "bolt.moved":
			p = book.move(item, body)
		case kind == "figures.read":
			p = book.figure(item, body, id)
		case kind == "power_control.confirmed":
			book.controlOff = true
		case kind == "obstacle.noted":
			p = book.note(item, body, id)
		}
		if p != nil {
			return nil, p
		}
	}
	return book.close(doc), nil
}

// book holds the readings while entries are laid over them.
type book struct {
	antennas map[string]*codec.Value
	pages    map[page][]line
	turned   map[page]bool // bolt moved, whether read again or not
	survey
}

type page struct{ antenna, quantity, state string }

type line struct {
	entry   string // id of the entry it came with; empty when it stood in the sheet
	reading *codec.Value
}

// fields maps the quantity of an entry to its field in the sheet.
func fieldOf(quantity string) string {
	if quantity == "position" {
		return "position_mm"
	}
	return quantity
}

var quantities = []string{"skew", "tilt", "azimuth", "position"}

func openBook(doc *codec.Value) *book {
	b := &book{map[string]*codec.Value{}, map[page][]line{}, map[page]bool{}, openSurvey(doc)}
	list := doc.Get("near").Get("antennas")
	if list == nil {
		return b // a probe has no antennas
	}
	for _, a := range list.Items {
		id := a.Get("id").Str
		b.antennas[id] = a
		for _, q := range quantities {
			for _, state := range []string{"as_found", "as_left"} {
				there := a.Get(fieldOf(q)).Get(state)
				switch {
				case there == nil || there.Kind == codec.Null:
				case there.Kind == codec.Object:
					b.pages[page{id, q, state}] = []line{{"", there}}
				default:
					b.turned[page{id, q, state}] = len(there.Items) == 0
					for _, r := range there.Items {
						b.pages[page{id, q, state}] = append(b.pages[page{id, q, state}], line{"", r})
					}
				}
			}
		}
	}
	return b
}

func (b *book) take(item, body *codec.Value, id string) *codec.Problem {
	if body == nil {
		return item.Refuse(codec.MissingField, "a reading needs its body")
	}
	f := codec.Open(body)
	p := page{state: f.Choice("phase", "as_found", "as_left"), antenna: f.Text("antenna"), quantity: f.Choice("quantity", quantities...)}
	reading := f.Child("reading")
	f.MaybeText("typed")
	if problem := f.Done(); problem != nil {
		return problem
	}
	if b.antennas[p.antenna] == nil {
		return f.Refuse("antenna", codec.Impossible, "the sheet has no near antenna of this name")
	}
	var problem *codec.Problem
	switch p.quantity {
	case "skew":
		_, problem = readAngle(reading, skew, false)
	case "tilt":
		_, problem = readAngle(reading, tilt, false)
	case "azimuth":
		_, problem = readAngle(reading, azimuth, false)
	default:
		_, problem = readPosition(reading, false)
	}
	if problem != nil {
		return problem
	}
	if len(b.pages[p]) >= MaxReadings {
		return item.Refuse(codec.TooLarge, "this quantity has 200 readings already; move the bolt or withdraw some")
	}
	b.pages[p] = append(b.pages[p], line{id, reading})
	return nil
}

func (b *book) withdraw(item, body *codec.Value) *codec.Problem {
	if body == nil {
		return item.Refuse(codec.MissingField, "a withdrawal needs its body")
	}
	f := codec.Open(body)
	id := f.Text("withdraws")
	if p := f.Done(); p != nil {
		return p
	}
	if id == "" {
		return f.Refuse("withdraws", codec.MissingField, "must name the entry it withdraws")
	}
	for p, lines := range b.pages {
		for i := range lines {
			if lines[i].entry == id {
				b.pages[p] = append(append([]line{}, lines[:i]...), lines[i+1:]...)
				return nil
			}
		}
	}
	b.survey.withdraw(id)
	return nil // its reading is gone already: a bolt moved since
}

func (b *book) move(item, body *codec.Value) *codec.Problem {
	if body == nil {
		return item.Refuse(codec.MissingField, "a moved bolt needs its body")
	}
	f := codec.Open(body)
	p := page{state: "as_left", antenna: f.Text("antenna"), quantity: f.Choice("quantity", quantities...)}
	if problem := f.Done(); problem != nil {
		return problem
	}
	if b.antennas[p.antenna] == nil {
		return f.Refuse("antenna", codec.Impossible, "the sheet has no near antenna of this name")
	}
	delete(b.pages, p)
	b.turned[p] = true
	return nil
}

// close writes the readings into a copy of the document. Only what lies on the
// way to a reading is copied.
func (b *book) close(doc *codec.Value) *codec.Value {
	list := doc.Get("near").Get("antennas")
	if list == nil {
		return doc
	}
	antennas := codec.Seq()
	for _, a := range list.Items {
		out := copyOf(a)
		for _, q := range quantities {
			states := a.Get(fieldOf(q))
			if states == nil || states.Kind != codec.Object {
				continue
			}
			states = copyOf(states)
			for _, state := range []string{"as_found", "as_left"} {
				p := page{a.Get("id").Str, q, state}
				readings := codec.Nothing()
				if len(b.pages[p]) > 0 || b.turned[p] {
					readings = codec.Seq()
					for _, l := range b.pages[p] {
						readings.Items = append(readings.Items, l.reading)
					}
				}
				states.Set(state, readings)
			}
			out.Set(fieldOf(q), states)
		}
		antennas.Items = append(antennas.Items, out)
	}
	near := copyOf(doc.Get("near"))
	near.Set("antennas", antennas)
	whole := copyOf(doc)
	whole.Set("near", near)
	b.survey.close(whole)
	return whole
}

func copyOf(v *codec.Value) *codec.Value {
	return codec.Obj(append([]codec.Member{}, v.Members...)...)
}
