package main

import (
	"fmt"
	"io"
)

// budget is what all that a phone and a desk fetch may weigh on the way, compressed: 1.2 MB (the task of the first
// thread from mast to sign-off). At the 100 kbit/s of a poor cell that is a minute and a half, once.
const budget = 1_200_000

// report prints the wire size of each part and fails over the budget.
func report(out io.Writer, gen *folder, quick bool) error {
	type row struct{ files, plain, wire int }
	rows := map[part]row{}
	total, phone := 0, 0
	for _, f := range gen.sorted() {
		if f.part == partRest {
			continue
		}
		r := rows[f.part]
		rows[f.part] = row{r.files + 1, r.plain + len(f.content), r.wire + f.wire()}
		total += f.wire()
		if f.phone {
			phone += f.wire()
		}
	}
	fmt.Fprintf(out, "weight (bytes)   files     plain   on the wire (brotli)\n")
	for _, p := range []part{partPage, partScript, partStyle, partFont, partIcon, partWasm} {
		fmt.Fprintf(out, "  %-13s %6d %9d %9d\n", p, rows[p].files, rows[p].plain, rows[p].wire)
	}
	fmt.Fprintf(out, "  phone only           %25d\n", phone)
	fmt.Fprintf(out, "  all                  %25d of %d allowed\n", total, budget)
	if quick {
		fmt.Fprintln(out, "  compressed fast, not small: these are not the weights of a release")
		return nil
	}
	if total > budget {
		return fmt.Errorf("the pages weigh %d bytes on the wire, %d are allowed", total, budget)
	}
	return nil
}
