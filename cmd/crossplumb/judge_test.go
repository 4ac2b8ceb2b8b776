package main

import (
	"encoding/json"
	"os"
	"path/filepath"
	"strings"
	"testing"
)

func jobPath(name string) string {
	return filepath.Join("..", "..", "testdata", "jobs", name+".json")
}

func TestJudgeTellsItsWordByTheStatus(t *testing.T) {
	for _, row := range []struct {
		args   []string
		status int
		says   string
	}{
		{[]string{jobPath("crossed-pair-go")}, statusGo, "GO\n"},
		{[]string{jobPath("crossed-pair-no-go")}, statusNoGo, "Turn A 8.2° anticlockwise"},
		{[]string{jobPath("crossed-pair-measure-again")}, statusMeasureAgain, "The skew of A decides"},
		{[]string{jobPath("crossed-pair-skewed-combining")}, statusGo, "combines its chains"},
		{[]string{"--json", jobPath("crossed-pair-no-go")}, statusNoGo, `"word":"no-go"`},
	} {
		var out, errs strings.Builder
		if got := runJudge(row.args, strings.NewReader(""), &out, &errs); got != row.status {
			t.Errorf("%v: status %d, want %d: %s", row.args, got, row.status, errs.String())
		}
		if !strings.Contains(out.String(), row.says) || errs.Len() > 0 {
			t.Errorf("%v: printed %q and %q, want %q in it", row.args, out.String(), errs.String(), row.says)
		}
		if strings.Contains(out.String(), "probability 1.0") || strings.Contains(out.String(), "probability 0.00") {
			t.Errorf("%v calls something certain: %s", row.args, out.String())
		}
	}
}

func TestJudgeSaysWhatIsWrongWithASheet(t *testing.T) {
	in, err := os.ReadFile(jobPath("crossed-pair-no-go"))
	if err != nil {
		t.Fatal(err)
	}
	for _, row := range []struct {
		name  string
		args  []string
		stdin string
		says  string
	}{
		{"no argument", nil, "", "usage"},
		{"no such file", []string{"no such sheet.json"}, "", "no such sheet.json"},
		{"not JSON", []string{"-"}, "{", "malformed"},
		{"impossible skew", []string{"-"}, strings.Replace(string(in), `"value": 8.0`, `"value": 400`, 1), "near.antennas[0].skew.as_left[0].value"},
	} {
		var out, errs strings.Builder
		if got := runJudge(row.args, strings.NewReader(row.stdin), &out, &errs); got != statusUnreadable || out.Len() > 0 {
			t.Errorf("%s: status %d, printed %q", row.name, got, out.String())
		}
		if !strings.Contains(errs.String(), row.says) {
			t.Errorf("%s: said %q, want %q in it", row.name, errs.String(), row.says)
		}
	}
}

func TestReckon(t *testing.T) {
	const ask = `{"near":{"slant_deg":45},"far":{"slant_deg":45}}`
	var out, errs strings.Builder
	if got := runReckon([]string{"polarization.loss"}, strings.NewReader(ask), &out, &errs); got != 0 || errs.Len() > 0 {
		t.Fatalf("status %d: %s", got, errs.String())
	}
	var answer struct {
		Blind  bool
		Method struct{ Version string }
	}
	if err := json.Unmarshal([]byte(out.String()), &answer); err != nil || !answer.Blind || answer.Method.Version == "" {
		t.Errorf("%v: %s", err, out.String())
	}
	for _, row := range []struct{ op, in, code string }{
		{"polarization.loss", `{}`, "missing_field"},
		{"polarization.gain", ask, "unknown_operation"},
		{"polarization.loss", strings.Repeat(" ", 3<<20), "too_large"},
	} {
		out.Reset()
		errs.Reset()
		if got := runReckon([]string{row.op}, strings.NewReader(row.in), &out, &errs); got != 2 || out.Len() > 0 {
			t.Errorf("%s: status %d, printed %q", row.code, got, out.String())
		}
		var problem struct{ Code string }
		if err := json.Unmarshal([]byte(errs.String()), &problem); err != nil || problem.Code != row.code {
			t.Errorf("%s: said %q (%v)", row.code, errs.String(), err)
		}
	}
}
