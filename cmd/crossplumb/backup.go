package main

import (
	"context"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"time"

	"crossplumb/db"
)

func runBackup(ctx context.Context, args []string, io streams) error {
	var data, to string
	f := flags("backup", io)
	f.StringVar(&data, "data", "", "folder of the database; its server may go on running")
	f.StringVar(&to, "to", "", "new file to write, on another disk if there is one")
	if err := parse(f, args); err != nil {
		return err
	}
	if data == "" || to == "" {
		return usageError{errors.New("--data says where the database lies, --to where the backup goes")}
	}
	store, err := openExisting(ctx, data)
	if err != nil {
		return err
	}
	defer store.Close()
	proof, err := store.Backup(ctx, to)
	if err != nil {
		return err
	}
	fmt.Fprintf(io.out, "%s: %d entries, head %d %s, proved\n", to, proof.Entries, proof.Head.Seq, proof.Head.Hash)
	return nil
}

func runRestore(ctx context.Context, args []string, io streams) error {
	var data, from string
	f := flags("restore", io)
	f.StringVar(&data, "data", "", "folder of the database; stop its server first")
	f.StringVar(&from, "from", "", "the backup")
	if err := parse(f, args); err != nil {
		return err
	}
	if data == "" || from == "" {
		return usageError{errors.New("--data says where the database lies, --from where the backup is")}
	}
	if err := os.MkdirAll(data, 0o700); err != nil {
		return err
	}
	unlock, err := lockFolder(data)
	if err != nil {
		return err
	}
	defer unlock()
	result, err := db.Restore(ctx, from, filepath.Join(data, databaseName), time.Now())
	if err != nil {
		return err
	}
	fmt.Fprintf(io.out, "restored: %d entries, head %d, epoch %d\n", result.Proof.Entries, result.Proof.Head.Seq, result.Epoch)
	if result.Kept != "" {
		fmt.Fprintf(io.out, "what was there is kept as %s\n", result.Kept)
	}
	fmt.Fprintln(io.out, "every session has ended: people sign in again, and their phones then offer whatever the backup does not have.\n"+
		"Decisions of the desk and changes of people after the backup are to be made again; whoever was disabled since can sign in again.")
	return nil
}
