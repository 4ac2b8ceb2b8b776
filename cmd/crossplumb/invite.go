package main

import (
	"context"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"strings"

	"crossplumb/db"
	"crossplumb/server"
)

func runInvite(ctx context.Context, args []string, io streams) error {
	var data, role, crew, origin string
	f := flags("invite", io)
	f.StringVar(&data, "data", "", "folder of the database")
	f.StringVar(&role, "role", db.Climber, "climber or supervisor")
	f.StringVar(&crew, "crew", "", "the crew that a climber belongs to")
	f.StringVar(&origin, "origin", "http://127.0.0.1:8480", "what people type to come to the server")
	if err := parse(f, args); err != nil {
		return err
	}
	crew = strings.Join(strings.Fields(crew), " ")
	switch {
	case data == "":
		return usageError{errors.New("--data says where the database lies")}
	case role != db.Climber && role != db.Supervisor:
		return usageError{errors.New("--role is climber or supervisor")}
	case role == db.Climber && crew == "":
		return usageError{errors.New("--crew is needed for a climber")}
	}
	store, err := openExisting(ctx, data)
	if err != nil {
		return err
	}
	defer store.Close()
	token, until, err := store.Invite(ctx, "", role, crew)
	if err != nil {
		return err
	}
	fmt.Fprintf(io.out, "%s\nworks once, until %s\n", server.InvitationLink(origin, role, token), until.Local().Format("2006-01-02 15:04"))
	return nil
}

// openExisting opens a database that is there: a misspelt folder must not become a new, empty one.
func openExisting(ctx context.Context, data string) (*db.Store, error) {
	path := filepath.Join(data, databaseName)
	if _, err := os.Stat(path); err != nil {
		return nil, fmt.Errorf("there is no database in %s", data)
	}
	return db.Open(ctx, db.Config{Path: path, App: "crossplumb " + version})
}
