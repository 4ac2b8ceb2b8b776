package db

import (
	"context"
	"fmt"
)

// Proof is what was looked at and what was wrong with it.
type Proof struct {
	Entries     int64
	Quarantined int64
	Audit       int64
	Head        Head
	// Gaps lists devices with entries missing below their highest. A gap is no fault: what is missing is still on a
	// phone. It is reported so that somebody looks for the phone.
	Gaps   []Device
	Faults []string
}

// maxFaults ends the list: after so many the rest tells nothing new.
const maxFaults = 100

func (p *Proof) fault(format string, args ...any) {
	if len(p.Faults) < maxFaults {
		p.Faults = append(p.Faults, fmt.Sprintf(format, args...))
	}
}

// Prove checks the whole record against itself: the file's own integrity, foreign keys, the server's chain, every
// entry's hash and columns against its text, each device's chain, the audit's chain. It reads in pages, so it can run
// beside a server. The error is of reading; what is wrong is in the Proof.
func (s *Store) Prove(ctx context.Context) (Proof, error) {
	var p Proof
	for _, step := range []func(context.Context, *Proof) error{
		s.proveFile, s.proveEntries, s.proveDevices, s.proveQuarantine, s.proveAudit,
	} {
		if err := step(ctx, &p); err != nil {
			return p, err
		}
	}
	return p, nil
}

func (s *Store) proveFile(ctx context.Context, p *Proof) error {
	rows, err := s.read.QueryContext(ctx, "PRAGMA integrity_check(20)")
	if err != nil {
		return err
	}
	lines, err := collect(rows, func(line *string) []any { return []any{line} })
	if err != nil {
		return err
	}
	for _, line := range lines {
		if line != "ok" {
			p.fault("integrity: %s", line)
		}
	}
	type broken struct {
		table, parent string
		rowid         any
		key           int
	}
	rows, err = s.read.QueryContext(ctx, "PRAGMA foreign_key_check")
	if err != nil {
		return err
	}
	list, err := collect(rows, func(b *broken) []any { return []any{&b.table, &b.rowid, &b.parent, &b.key} })
	if err != nil {
		return err
	}
	for _, b := range list {
		p.fault("foreign key: a row of %s points to a row of %s that is not there", b.table, b.parent)
	}
	return nil
}

func (s *Store) proveEntries(ctx context.Context, p *Proof) error {
	type row struct {
		seq, deviceSeq, schema, receivedMs                                     int64
		id, device, prev, hash, job, mount, kind, author, uploader, raw, chain string
	}
	for {
		rows, err := s.read.QueryContext(ctx, `
			SELECT seq, id, device, device_seq, prev, hash, job, coalesce(mount, ''), kind, schema, author, uploader,
				received_ms, raw, chain
			FROM entries WHERE seq > ? ORDER BY seq LIMIT ?`, p.Head.Seq, page)
		if err != nil {
			return err
		}
		batch, err := collect(rows, func(r *row) []any {
			return []any{&r.seq, &r.id, &r.device, &r.deviceSeq, &r.prev, &r.hash, &r.job, &r.mount, &r.kind, &r.schema,
				&r.author, &r.uploader, &r.receivedMs, &r.raw, &r.chain}
		})
		if err != nil {
			return err
		}
		for _, r := range batch {
			p.Entries++
			if r.seq != p.Head.Seq+1 {
				p.fault("entries %d to %d are missing", p.Head.Seq+1, r.seq-1)
			}
			if HashOf(r.raw) != r.hash {
				p.fault("entry %d: its text was changed, the hash differs", r.seq)
			}
			if ChainHash(p.Head.Hash, r.seq, r.receivedMs, r.uploader, r.raw) != r.chain {
				p.fault("entry %d: the server's chain is broken here", r.seq)
			}
			switch e, err := ReadEntry(r.raw); {
			case err != nil:
				p.fault("entry %d: %v", r.seq, err)
			case e.ID != r.id || e.Device != r.device || e.DeviceSeq != r.deviceSeq || e.Prev != r.prev || e.Job != r.job ||
				e.Mount != r.mount || e.Kind != r.kind || int64(e.Schema) != r.schema || e.Author != r.author:
				p.fault("entry %d: its columns say other things than its text", r.seq)
			}
			p.Head = Head{Seq: r.seq, Hash: r.chain}
		}
		if len(batch) < page {
			return nil
		}
	}
}

func (s *Store) proveDevices(ctx context.Context, p *Proof) error {
	type link struct {
		device string
		seq    int64
	}
	rows, err := s.read.QueryContext(ctx, `
		SELECT e.device, e.device_seq FROM entries e
		JOIN entries b ON b.device = e.device AND b.device_seq = e.device_seq - 1
		WHERE e.prev <> b.hash ORDER BY e.seq LIMIT ?`, maxFaults)
	if err != nil {
		return err
	}
	list, err := collect(rows, func(l *link) []any { return []any{&l.device, &l.seq} })
	if err != nil {
		return err
	}
	for _, l := range list {
		p.fault("device %s: entry %d does not follow the one before it", l.device, l.seq)
	}
	rows, err = s.read.QueryContext(ctx, `
		SELECT device, contiguous_seq, contiguous_hash, highest_seq FROM devices WHERE contiguous_seq < highest_seq
		ORDER BY device LIMIT ?`, maxFaults)
	if err != nil {
		return err
	}
	p.Gaps, err = collect(rows, func(d *Device) []any {
		return []any{&d.Device, &d.ContiguousSeq, &d.ContiguousHash, &d.HighestSeq}
	})
	return err
}

func (s *Store) proveQuarantine(ctx context.Context, p *Proof) error {
	type row struct {
		n         int64
		hash, raw string
	}
	for after := int64(0); ; {
		rows, err := s.read.QueryContext(ctx, "SELECT n, raw_hash, raw FROM quarantine WHERE n > ? ORDER BY n LIMIT ?", after, page)
		if err != nil {
			return err
		}
		batch, err := collect(rows, func(r *row) []any { return []any{&r.n, &r.hash, &r.raw} })
		if err != nil {
			return err
		}
		for _, r := range batch {
			p.Quarantined++
			if HashOf(r.raw) != r.hash {
				p.fault("quarantined entry %d: its text was changed, the hash differs", r.n)
			}
			after = r.n
		}
		if len(batch) < page {
			return nil
		}
	}
}

func (s *Store) proveAudit(ctx context.Context, p *Proof) error {
	type row struct {
		n, atMs                       int64
		person, action, detail, chain string
	}
	before := ""
	for after := int64(0); ; {
		rows, err := s.read.QueryContext(ctx,
			"SELECT n, at_ms, coalesce(person, ''), action, detail, chain FROM audit WHERE n > ? ORDER BY n LIMIT ?", after, page)
		if err != nil {
			return err
		}
		batch, err := collect(rows, func(r *row) []any { return []any{&r.n, &r.atMs, &r.person, &r.action, &r.detail, &r.chain} })
		if err != nil {
			return err
		}
		for _, r := range batch {
			p.Audit++
			if auditHash(before, r.atMs, r.person, r.action, r.detail) != r.chain {
				p.fault("audit line %d: the chain is broken here", r.n)
			}
			before, after = r.chain, r.n
		}
		if len(batch) < page {
			return nil
		}
	}
}
