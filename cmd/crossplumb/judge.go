package main

import (
	"encoding/json"
	"fmt"
	"io"
	"os"
	"strings"

	"crossplumb/calc/wire"
)

// The exit statuses of crossplumb judge.
const (
	statusGo           = 0
	statusNoGo         = 1
	statusMeasureAgain = 2
	statusUnreadable   = 3
)

// runJudge prints the verdict on a mount sheet: crossplumb judge [--json] SHEET,
// SHEET being a file or - for stdin. Status 0 go, 1 no-go, 2 measure again, 3 the
// sheet cannot be read.
func runJudge(args []string, stdin io.Reader, stdout, stderr io.Writer) int {
	asJSON := false
	if len(args) > 0 && args[0] == "--json" {
		asJSON, args = true, args[1:]
	}
	if len(args) != 1 || args[0] == "-h" || args[0] == "--help" {
		fmt.Fprintln(stderr, "usage: crossplumb judge [--json] SHEET.json   (- reads the sheet from stdin)\n\nstatus: 0 go, 1 no-go, 2 measure again, 3 the sheet cannot be read")
		return statusUnreadable
	}
	from := stdin
	if args[0] != "-" {
		f, err := os.Open(args[0])
		if err != nil {
			fmt.Fprintln(stderr, "crossplumb:", err)
			return statusUnreadable
		}
		defer f.Close()
		from = f
	}
	in, err := readAll(from)
	if err != nil {
		fmt.Fprintln(stderr, "crossplumb: cannot read the sheet:", err)
		return statusUnreadable
	}
	out, problem := wire.Reckon("mount.verdict", in)
	if problem != nil {
		where := ""
		if problem.Field != "" {
			where = problem.Field + ": "
		}
		fmt.Fprintln(stderr, "crossplumb: "+where+problem.Message+" ("+problem.Code+")")
		return statusUnreadable
	}
	var v judged
	if err := json.Unmarshal(out, &v); err != nil {
		fmt.Fprintln(stderr, "crossplumb: cannot read our own verdict:", err)
		return statusUnreadable
	}
	if asJSON {
		stdout.Write(append(out, '\n'))
	} else {
		v.print(stdout)
	}
	switch v.Word {
	case "go":
		return statusGo
	case "no-go":
		return statusNoGo
	}
	return statusMeasureAgain
}

// judged is the part of a verdict that is printed.
type judged struct {
	Word        string
	Probability float64
	Judged      string
	Reason      struct{ Text string }
	Limits      []struct {
		Name, Sense, Unit     string
		Limit                 float64
		Value, U, Probability *float64
		WhyNot                *string `json:"why_not"`
	}
	Remedies []struct {
		Text             string
		Limit            string
		From, To         *float64
		WordAfter        string  `json:"word_after"`
		ProbabilityAfter float64 `json:"probability_after"`
	}
	Missing      []struct{ Antenna, Quantity string }
	FarFromPlan  bool `json:"far_from_plan"`
	Surroundings struct{ Text string }
	Method       struct{ Version string }
}

func (v *judged) print(w io.Writer) {
	fmt.Fprintf(w, "%s\n%s\n\n", strings.ToUpper(v.Word), v.Reason.Text)
	fmt.Fprintf(w, "%-24s %10s %10s %10s %12s\n", "judged "+strings.ReplaceAll(v.Judged, "_", " "), "value", "doubt", "limit", "probability")
	for _, l := range v.Limits {
		if l.Value == nil && l.WhyNot != nil {
			fmt.Fprintf(w, "%-24s %s\n", l.Name, *l.WhyNot)
			continue
		}
		sense := "≥"
		if l.Sense == "at most" {
			sense = "≤"
		}
		fmt.Fprintf(w, "%-24s %10s %10s %10s %12s  %s\n", l.Name, figure(l.Value), figure(l.U), sense+figure(&l.Limit), chance(l.Probability), l.Unit)
	}
	fmt.Fprintf(w, "\nall limits together: probability %s\n", chance(&v.Probability))
	for _, m := range v.Missing {
		fmt.Fprintf(w, "not measured: %s of %s\n", m.Quantity, m.Antenna)
	}
	for _, r := range v.Remedies {
		fmt.Fprintf(w, "%s: %s %s to %s, %s (probability %s)\n", r.Text, r.Limit, figure(r.From), figure(r.To), r.WordAfter, chance(&r.ProbabilityAfter))
	}
	if v.FarFromPlan {
		fmt.Fprintln(w, "The far end is taken from its plan.")
	}
	fmt.Fprintf(w, "Surroundings: %s.\nMethod %s. The verdict is about the antennas, not about anybody's safety on the mast.\n", v.Surroundings.Text, v.Method.Version)
}

// figure is a number to three significant digits, or a dash.
func figure(x *float64) string {
	if x == nil {
		return "–"
	}
	return fmt.Sprintf("%.3g", *x)
}

// chance is a probability in words of two digits, never called certain.
func chance(p *float64) string {
	switch {
	case p == nil:
		return "–"
	case *p < 0.005:
		return "<0.01"
	case *p > 0.995:
		return ">0.99"
	}
	return fmt.Sprintf("%.2f", *p)
}
