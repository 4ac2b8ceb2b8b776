package main

import (
	"context"
	"errors"
	"fmt"
)

func runProve(ctx context.Context, args []string, io streams) error {
	var data string
	var rebuild bool
	f := flags("prove", io)
	f.StringVar(&data, "data", "", "folder of the database")
	f.BoolVar(&rebuild, "rebuild", false, "derive every table again from the log, compare, and keep what the log says; stop the server first")
	if err := parse(f, args); err != nil {
		return err
	}
	if data == "" {
		return usageError{errors.New("--data says where the database lies")}
	}
	if rebuild {
		unlock, err := lockFolder(data)
		if err != nil {
			return err
		}
		defer unlock()
	}
	store, err := openExisting(ctx, data)
	if err != nil {
		return err
	}
	defer store.Close()
	proof, err := store.Prove(ctx)
	if err != nil {
		return err
	}
	fmt.Fprintf(io.out, "entries      %d\nquarantined  %d\naudit        %d\nhead         %d %s\n",
		proof.Entries, proof.Quarantined, proof.Audit, proof.Head.Seq, proof.Head.Hash)
	for _, d := range proof.Gaps {
		fmt.Fprintf(io.out, "gap          device %s: after its entry %d some are still out, up to %d\n", d.Device, d.ContiguousSeq, d.HighestSeq)
	}
	for _, fault := range proof.Faults {
		fmt.Fprintf(io.out, "FAULT        %s\n", fault)
	}
	differ := 0
	if rebuild {
		if len(proof.Faults) > 0 {
			fmt.Fprintln(io.out, "not rebuilt: a log with faults is no ground to build on")
		} else {
			differences, err := store.Rebuild(ctx, true)
			if err != nil {
				return err
			}
			for _, d := range differences {
				fmt.Fprintf(io.out, "DIFFERS      %s\n", d)
			}
			if differ = len(differences); differ == 0 {
				fmt.Fprintln(io.out, "rebuilt      every derived table came out the same")
			}
		}
	}
	if len(proof.Faults) > 0 || differ > 0 {
		return status(exitFailed)
	}
	fmt.Fprintln(io.out, "proved: chains, hashes, integrity and foreign keys hold")
	return nil
}
