package main

import (
	"fmt"
	"io"

	"crossplumb/calc/codec"
	"crossplumb/calc/wire"
)

// runReckon runs one operation on the JSON of stdin: crossplumb reckon OP < in.json.
// The answer goes to stdout with status 0, a problem to stderr with status 2.
// Without a name it lists the operations.
func runReckon(args []string, stdin io.Reader, stdout, stderr io.Writer) int {
	if len(args) != 1 || args[0] == "-h" || args[0] == "--help" {
		fmt.Fprintln(stderr, "usage: crossplumb reckon OP < in.json\n\noperations:")
		for _, op := range wire.Operations() {
			fmt.Fprintln(stderr, "  "+op)
		}
		return 2
	}
	in, err := readAll(stdin)
	if err != nil {
		fmt.Fprintln(stderr, "crossplumb: cannot read the input:", err)
		return 2
	}
	out, problem := wire.Reckon(args[0], in)
	if problem != nil {
		stderr.Write(append(problem.JSON(), '\n'))
		return 2
	}
	stdout.Write(append(out, '\n'))
	return 0
}

// readAll reads what an operation would take and one byte more, so that the door
// itself refuses what is too large.
func readAll(r io.Reader) ([]byte, error) {
	return io.ReadAll(io.LimitReader(r, codec.MaxBytes+1))
}
