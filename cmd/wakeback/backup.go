package main

import (
	"context"
	"fmt"
	"time"

	"wakeback/server"
)

type backupCmd struct {
	File string `arg:"" help:"File to write." type:"path"`
	Data string `help:"Folder of the running server." placeholder:"DIR" type:"path"`
	JSON bool   `name:"json" help:"Print one JSON document."`
}

// Help is shown by wakeback backup --help.
func (backupCmd) Help() string {
	return `The copy is whole and of one moment. Put it in an empty folder as wakeback.db, and wakeback serve --data that folder opens it.

  wakeback backup /media/stick/wakeback.db`
}

// backupTime: a store of a season is copied in seconds, to a slow stick in
// minutes; our choice.
const backupTime = 10 * time.Minute

// Run has the running server write the copy.
func (c *backupCmd) Run(e *env) error {
	data, err := dataDir(c.Data)
	if err != nil {
		return err
	}
	ctx, cancel := context.WithTimeout(e.ctx, backupTime)
	defer cancel()
	if err := server.AskBackup(ctx, data, c.File); err != nil {
		return fmt.Errorf("backup: %w", err)
	}
	if c.JSON {
		return e.printJSON(map[string]string{"path": c.File})
	}
	_, err = fmt.Fprintln(e.out, "Written:", c.File)
	return err
}
