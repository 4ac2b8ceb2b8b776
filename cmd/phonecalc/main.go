//go:build js

// Command phonecalc is calc as the phone runs it: compiled to WebAssembly, hung on one global of a Worker.
//
//	crossplumbReckon(op, json) -> {answer: json} or {code, field, message}
package main

import (
	"syscall/js"

	"crossplumb/calc/wire"
)

func main() {
	js.Global().Set("crossplumbReckon", js.FuncOf(reckon))
	select {} // an instance whose main returned answers no more calls
}

// reckon checks the types before reading them: a panic ends the instance for good, for every later call.
func reckon(_ js.Value, args []js.Value) any {
	if len(args) != 2 || args[0].Type() != js.TypeString || args[1].Type() != js.TypeString {
		return map[string]any{"code": "malformed", "field": "", "message": "crossplumbReckon takes two strings: operation, JSON"}
	}
	answer, problem := wire.Reckon(args[0].String(), []byte(args[1].String()))
	if problem != nil {
		return map[string]any{"code": problem.Code, "field": problem.Field, "message": problem.Message}
	}
	return map[string]any{"answer": string(answer)}
}
