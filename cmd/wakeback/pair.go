package main

import (
	"context"
	"fmt"
	"io"
	"time"

	"github.com/skip2/go-qrcode"

	"wakeback/server"
	"wakeback/server/gate"
)

type pairCmd struct {
	Data string `help:"Folder of the running server." placeholder:"DIR" type:"path"`
	Role string `help:"What the phone may do: watch (see, hear and mark), crew (also report), skipper (also decide)." default:"crew" placeholder:"ROLE"`
	JSON bool   `name:"json" help:"Print one JSON document."`
}

// Help is shown by wakeback pair --help.
func (pairCmd) Help() string {
	return `Run it on the machine on which the server runs. Open the link on the phone, or scan the code with it. A link works once, and for a short while.

  wakeback pair
  wakeback pair --role skipper
  wakeback pair --data /var/lib/wakeback --json`
}

// askTime is how long the running server may take to answer; our choice,
// because a disk that is slow to wake takes seconds, not more.
const askTime = 15 * time.Second

type pairResult struct {
	Code      string    `json:"code"`
	URL       string    `json:"url"`
	Role      string    `json:"role"`
	ExpiresAt time.Time `json:"expires_at"`
}

// Run asks the server and prints the link.
func (c *pairCmd) Run(e *env) error {
	role, err := gate.ParseRole(c.Role)
	if err != nil {
		return badInput("--role", err)
	}
	data, err := dataDir(c.Data)
	if err != nil {
		return err
	}
	ctx, cancel := context.WithTimeout(e.ctx, askTime)
	defer cancel()
	link, err := server.AskPair(ctx, data, role)
	if err != nil {
		return fmt.Errorf("pair: %w", err)
	}
	if c.JSON {
		return e.printJSON(pairResult{link.Code, link.URL, link.Role.String(), link.ExpiresAt.UTC()})
	}
	code, err := qr(link.URL)
	if err != nil {
		return err
	}
	fmt.Fprint(e.out, code)
	return table(e.out, func(w io.Writer) {
		fmt.Fprintf(w, "Open\t%s\nCode\t%s\nRole\t%s\nUntil\t%s\n", link.URL, link.Code, link.Role, link.ExpiresAt.Local().Format("15:04:05 MST"))
	})
}

// qr is a code for a terminal, with the quiet margin that scanners need.
func qr(url string) (string, error) {
	code, err := qrcode.New(url, qrcode.Medium)
	if err != nil {
		return "", fmt.Errorf("make the QR code: %w", err)
	}
	return code.ToSmallString(false), nil
}
