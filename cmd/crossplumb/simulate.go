package main

import (
	"context"
	"encoding/json/jsontext"
	json "encoding/json/v2"
	"fmt"
	"math"
	"math/rand/v2"
	"strings"
	"time"

	"github.com/google/uuid"

	"crossplumb/db"
	"crossplumb/server"
)

// demoSeed fixes the simulator's noise: each demo shows the same mounts.
const demoSeed = 20

// demoClock is the simulator's time, so that entries arrive when they would have.
type demoClock struct{ at time.Time }

func (c *demoClock) now() time.Time { return c.at }

// instrument is what reads: it is off by bias always, by a normal error of sd each time, and shows steps of step. u is
// the standard uncertainty that its user writes down; an honest one covers bias and sd.
type instrument struct {
	name, method      string
	bias, sd, step, u float64
}

var (
	goodLevel  = instrument{name: "level 3", method: "level", bias: 0.1, sd: 0.1, step: 0.1, u: 0.2}
	phoneTilt  = instrument{name: "phone", method: "phone", bias: 0.3, sd: 0.3, step: 0.1, u: 0.5}
	landmark   = instrument{name: "sight 2", method: "landmark", bias: 0.3, sd: 0.4, step: 0.1, u: 1}
	compass    = instrument{name: "hand compass", method: "compass", bias: -6.4, sd: 0.5, step: 1, u: 5}
	goodTape   = instrument{name: "tape 1", method: "tape", bias: 1, sd: 1.5, step: 1, u: 3}
	wornTape   = instrument{name: "tape 9, hook bent", method: "tape", bias: 8, sd: 12, step: 5, u: 25}
	quantities = []string{"skew", "tilt", "azimuth", "position"}
)

// truth is how one antenna really hangs. The tool never sees it.
type truth struct {
	skew, tilt, azimuth float64
	place               offsets
}

// fault is what the simulator planted in a mount, for the test that asks whether the tool finds it.
type fault struct {
	word     string // what the verdict must be
	limit    string // the limit that is missed, "" where none
	antenna  string
	quantity string
}

// mountRun is what happens to one mount on one visit.
type mountRun struct {
	id, name string
	sheet    sheet
	found    map[string]truth
	left     map[string]truth // nil: not adjusted yet
	leftSkip []string         // quantities that were not read again
	tape     instrument
	angles   instrument
	bearing  *instrument // nil: a landmark
	searches []searchRun
	pages    []pageRun
	planted  fault
}

// visit is one job from plan to where the demo leaves it.
type visit struct {
	site, title, crew  string
	lat, lon           float64
	access, emergency  string
	dayBefore          int    // days before today
	climber            string // who takes the readings
	mounts             []mountRun
	until              string // the stage where it stops
	remark, deskRemark string
	open               []string
}

// simulator writes what a crew would have written, through the same door as a phone's upload.
type simulator struct {
	ctx    context.Context
	store  *db.Store
	clock  *demoClock
	random *rand.Rand
	aimed  *rand.Rand // for peak searches, so that these change nothing of what is read elsewhere
	today  time.Time
	people map[string]db.Person
	phones map[string]*phone
}

// phone is one device with its own chain.
type phone struct {
	owner  db.Person
	device string
	seq    int64
	prev   string
	batch  []db.Incoming
}

func simulate(ctx context.Context, store *db.Store, clock *demoClock, seed uint64, cost server.HashCost, today time.Time) error {
	s := &simulator{ctx: ctx, store: store, clock: clock, random: rand.New(rand.NewPCG(seed, 1)), aimed: rand.New(rand.NewPCG(seed, 2)), today: today,
		people: map[string]db.Person{}, phones: map[string]*phone{}}
	clock.at = s.morning(12)
	for _, p := range demoPeople {
		person, err := store.AddPerson(ctx, p.name, p.role, p.crew, cost.Hash(p.passphrase))
		if err != nil {
			return fmt.Errorf("%s: %w", p.name, err)
		}
		s.people[p.name] = person
		s.phones[p.name] = &phone{owner: person, device: s.id(4).String()}
	}
	for _, v := range demoVisits() {
		if err := s.run(v); err != nil {
			return fmt.Errorf("%s: %w", v.site, err)
		}
	}
	return nil
}

// islandZone is the island's own time.
var islandZone = time.FixedZone("", -2*3600)

func (s *simulator) morning(daysBefore int) time.Time {
	d := s.today.In(islandZone).AddDate(0, 0, -daysBefore)
	return time.Date(d.Year(), d.Month(), d.Day(), 8, 10, 0, 0, islandZone)
}

// id makes a UUID from the seeded noise; version 7 carries the simulator's time.
func (s *simulator) id(version byte) uuid.UUID {
	var u uuid.UUID
	for i := range u {
		u[i] = byte(s.random.Uint32())
	}
	if version == 7 {
		ms := s.clock.at.UnixMilli()
		for i := range 6 {
			u[i] = byte(ms >> (40 - 8*i))
		}
	}
	u[6] = u[6]&0x0f | version<<4
	u[8] = u[8]&0x3f | 0x80
	return u
}

// later lets some minutes pass.
func (s *simulator) later(least, most int) {
	s.clock.at = s.clock.at.Add(time.Duration(least*60+s.random.IntN((most-least)*60+1)) * time.Second)
}

func (s *simulator) run(v visit) error {
	// Planned a day before the visit.
	s.clock.at = s.morning(v.dayBefore + 1).Add(2 * time.Hour)
	job := s.id(7).String()
	visitOn := s.morning(v.dayBefore).Format(time.DateOnly)
	plan := db.Plan{Site: v.site, Title: v.title, Crew: v.crew, VisitOn: &visitOn, Access: &v.access, Emergency: &v.emergency,
		LatDeg: &v.lat, LonDeg: &v.lon}
	for _, m := range v.mounts {
		plan.Mounts = append(plan.Mounts, db.PlannedMount{ID: m.id, Name: m.name, Sheet: m.sheet.text()})
	}
	desk := s.people["Ilse Marrow"]
	if _, err := s.store.AppendDesk(s.ctx, desk, []db.DeskEntry{
		{ID: s.id(7).String(), Job: job, Kind: db.JobPlanned, Body: plan},
		{ID: s.id(7).String(), Job: job, Kind: db.JobIssued, Body: struct{}{}},
	}); err != nil {
		return err
	}
	if v.until == db.StageIssued {
		return nil
	}
	s.clock.at = s.morning(v.dayBefore)
	p := s.phones[v.climber]
	for _, caution := range []string{"height", "weather", "rf"} {
		s.later(0, 1)
		p.write(s, job, "", db.CautionConfirmed, db.Caution{Caution: caution, Version: 1, Name: p.owner.Name})
	}
	s.later(20, 40)
	for _, m := range v.mounts {
		s.readAll(p, job, m, "as_found", m.found, nil)
		if err := s.aim(p, job, m); err != nil {
			return err
		}
		if m.left == nil {
			continue
		}
		for _, a := range m.sheet.Near.Antennas {
			for _, q := range quantities {
				if m.found[a.ID].of(q) != m.left[a.ID].of(q) {
					s.later(2, 6)
					p.write(s, job, m.id, db.BoltMoved, db.Moved{Antenna: a.ID, Quantity: q})
				}
			}
		}
		s.readAll(p, job, m, "as_left", m.left, m.leftSkip)
	}
	if v.until == db.StageUnderWay {
		return p.upload(s)
	}
	// Coverage comes back on the way down: the readings go up first, then the crew hands in.
	s.later(10, 20)
	if err := p.upload(s); err != nil {
		return err
	}
	verdicts, err := s.verdicts(job, v.mounts)
	if err != nil {
		return err
	}
	s.later(1, 3)
	open := v.open
	if open == nil {
		open = []string{}
	}
	p.write(s, job, "", db.JobHandedIn, db.HandedIn{Remark: orNoRemark(v.remark), Open: open, Verdicts: verdicts})
	if err := p.upload(s); err != nil {
		return err
	}
	if v.until == db.StageHandedIn {
		return nil
	}
	s.later(90, 180)
	stands, err := s.store.Job(s.ctx, desk, job)
	if err != nil {
		return err
	}
	kind := db.JobSignedOff
	if v.until == db.StageSentBack {
		kind = db.JobSentBack
	}
	_, err = s.store.AppendDesk(s.ctx, desk, []db.DeskEntry{
		{ID: s.id(7).String(), Job: job, Kind: kind, Body: db.Decision{Remark: orNoRemark(v.deskRemark), BaseSeq: stands.StageSeq}},
	})
	return err
}

func orNoRemark(s string) *string {
	if s == "" {
		return nil
	}
	return &s
}

func (t truth) of(quantity string) any {
	switch quantity {
	case "skew":
		return t.skew
	case "tilt":
		return t.tilt
	case "azimuth":
		return t.azimuth
	}
	return t.place
}

// readAll reads everything of a mount once.
func (s *simulator) readAll(p *phone, job string, m mountRun, phase string, hangs map[string]truth, skip []string) {
	for i, a := range m.sheet.Near.Antennas {
		for _, q := range quantities {
			if q == "azimuth" && a.Azimuth == nil || q == "position" && i == 0 || skipped(skip, a.ID+" "+q) {
				continue
			}
			s.later(1, 4)
			r, typed := s.read(m, q, hangs[a.ID])
			at := s.clock.at.Format(time.RFC3339)
			r.At, r.By = &at, &p.owner.Name
			text, err := json.Marshal(r)
			if err != nil {
				panic("demo: a reading that cannot be written")
			}
			p.write(s, job, m.id, db.ReadingTaken, db.Taken{Phase: phase, Antenna: a.ID, Quantity: q, Reading: text, Typed: &typed})
		}
	}
}

func skipped(list []string, what string) bool {
	for _, one := range list {
		if one == what {
			return true
		}
	}
	return false
}

func (s *simulator) read(m mountRun, quantity string, hangs truth) (r reading, typed string) {
	if quantity == "position" {
		r = reading{Unit: "mm", U: &m.tape.u, Method: m.tape.method, Instrument: &m.tape.name}
		at := offsets{Right: s.shown(m.tape, hangs.place.Right), Up: s.shown(m.tape, hangs.place.Up), Forward: s.shown(m.tape, hangs.place.Forward)}
		r.Value = at
		return r, comma(at.Right)
	}
	with := m.angles
	r = reading{Unit: "deg"}
	if quantity == "azimuth" {
		with = landmark
		if m.bearing != nil {
			with = *m.bearing
		}
		r.North = ptr("true")
	}
	r.U, r.Method, r.Instrument = &with.u, with.method, &with.name
	value := s.shown(with, hangs.of(quantity).(float64))
	r.Value = value
	return r, comma(value)
}

// shown is what the instrument shows of a true value.
func (s *simulator) shown(i instrument, value float64) float64 {
	steps := math.Round((value + i.bias + s.random.NormFloat64()*i.sd) / i.step)
	// Steps of a tenth are not exact in binary: rounded again to what a display shows.
	return math.Round(steps*i.step*1000) / 1000
}

// comma is how the crew types a number.
func comma(v float64) string { return strings.Replace(fmt.Sprint(v), ".", ",", 1) }

// write makes an entry on the phone and puts it with what waits.
func (p *phone) write(s *simulator, job, mount, kind string, body any) {
	p.seq++
	var mountOrNull *string
	if mount != "" {
		mountOrNull = &mount
	}
	raw, err := json.Marshal(struct {
		ID        string  `json:"id"`
		Device    string  `json:"device"`
		DeviceSeq int64   `json:"device_seq"`
		Prev      string  `json:"prev"`
		Job       string  `json:"job"`
		Mount     *string `json:"mount"`
		Kind      string  `json:"kind"`
		Schema    int     `json:"schema"`
		At        string  `json:"at"`
		MonoMs    int64   `json:"mono_ms"`
		Author    string  `json:"author"`
		App       string  `json:"app"`
		Body      any     `json:"body"`
	}{s.id(7).String(), p.device, p.seq, p.prev, job, mountOrNull, kind, 1, s.clock.at.Format(time.RFC3339),
		p.seq * 61_000, p.owner.ID, "crossplumb demo", body})
	if err != nil {
		panic("demo: an entry that cannot be written")
	}
	p.prev = db.HashOf(string(raw))
	p.batch = append(p.batch, db.Incoming{Raw: string(raw), Hash: p.prev})
}

// upload sends what waits, and takes nothing but "stored" for an answer.
func (p *phone) upload(s *simulator) error {
	receipt, err := s.store.Append(s.ctx, p.owner, s.clock.at.UnixMilli(), p.batch)
	if err != nil {
		return err
	}
	for _, a := range receipt.Answers {
		if a.Status != db.Stored {
			return fmt.Errorf("entry %s is %s: %s", a.ID, a.Status, a.Reason)
		}
	}
	p.batch = nil
	return nil
}

// verdicts asks calc what the phone would have asked it.
func (s *simulator) verdicts(job string, mounts []mountRun) ([]db.HandedVerdict, error) {
	stands, err := s.store.Job(s.ctx, s.people["Ilse Marrow"], job)
	if err != nil {
		return nil, err
	}
	log, err := s.store.JobLog(s.ctx, job, stands.HeadSeq)
	if err != nil {
		return nil, err
	}
	list := []db.HandedVerdict{}
	for _, m := range mounts {
		verdict, problem := server.JudgeMount(m.id, m.sheet.text(), log)
		if problem != nil {
			return nil, fmt.Errorf("mount %s: %s", m.id, problem.Error())
		}
		var said struct {
			Word        string         `json:"word"`
			Judged      string         `json:"judged"`
			Probability *float64       `json:"probability"`
			Method      jsontext.Value `json:"method"`
		}
		if err := json.Unmarshal(verdict, &said); err != nil {
			return nil, err
		}
		list = append(list, db.HandedVerdict{Mount: m.id, Phase: said.Judged, Word: said.Word, Probability: said.Probability, Method: said.Method})
	}
	return list, nil
}
