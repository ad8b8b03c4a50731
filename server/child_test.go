package server

import (
	"bufio"
	"context"
	"fmt"
	"io"
	"os"
	"os/exec"
	"strconv"
	"strings"
	"testing"

	"github.com/gorilla/websocket"
)

// This test binary can be started again as a process of another kind, so that
// a server can be killed, and so that those who measure it do not share its
// scheduler.
const (
	childServe  = "WAKEBACK_TEST_SERVE"  // a data folder to serve
	childListen = "WAKEBACK_TEST_LISTEN" // "N URL": streams to hold open
)

// childMain runs as a child if it was started as one.
func childMain() {
	switch {
	case os.Getenv(childServe) != "":
		serveChild(os.Getenv(childServe))
	case os.Getenv(childListen) != "":
		listenChild(os.Getenv(childListen))
	}
}

// serveChild serves until its input ends, and prints where once it does.
func serveChild(dir string) {
	ctx, cancel := context.WithCancel(context.Background())
	go func() {
		_, _ = io.Copy(io.Discard, os.Stdin)
		cancel()
	}()
	err := Run(ctx, Config{Listen: "127.0.0.1:0", Data: dir, OpenPairing: true, MaxStreams: 1000, Ready: func(r Ready) {
		for _, w := range r.Warnings {
			fmt.Fprintln(os.Stderr, "warning:", w)
		}
		fmt.Println(r.Addr)
	}})
	if err != nil {
		fmt.Fprintln(os.Stderr, err)
		os.Exit(1)
	}
	os.Exit(0)
}

// listenChild holds streams open until its input ends.
func listenChild(what string) {
	count, url, _ := strings.Cut(what, " ")
	n, err := strconv.Atoi(count)
	for range n {
		var conn *websocket.Conn
		if conn, _, err = websocket.DefaultDialer.Dial(url, nil); err != nil {
			break
		}
		go func() {
			for err := error(nil); err == nil; {
				_, _, err = conn.ReadMessage()
			}
		}()
	}
	if err != nil {
		fmt.Fprintln(os.Stderr, err)
		os.Exit(1)
	}
	fmt.Println("listening")
	_, _ = io.Copy(io.Discard, os.Stdin)
	os.Exit(0)
}

// child is this binary, running as a process of its own.
type child struct {
	cmd   *exec.Cmd
	stdin io.Closer
	said  string // its first line
}

func startChild(t testing.TB, kind, what string) *child {
	t.Helper()
	self, err := os.Executable()
	if err != nil {
		t.Fatal(err)
	}
	c := &child{cmd: exec.Command(self)}
	c.cmd.Env = append(os.Environ(), kind+"="+what)
	c.cmd.Stderr = os.Stderr
	if c.stdin, err = c.cmd.StdinPipe(); err != nil {
		t.Fatal(err)
	}
	out, err := c.cmd.StdoutPipe()
	if err != nil {
		t.Fatal(err)
	}
	if err := c.cmd.Start(); err != nil {
		t.Fatal(err)
	}
	t.Cleanup(c.stop)
	if c.said, err = bufio.NewReader(out).ReadString('\n'); err != nil {
		t.Fatalf("the child said nothing: %v", err)
	}
	c.said = strings.TrimSpace(c.said)
	return c
}

// stop ends the child in order; a child that has ended is left alone.
func (c *child) stop() {
	_ = c.stdin.Close()
	_ = c.cmd.Wait()
}

// kill ends the child without a word.
func (c *child) kill() {
	_ = c.cmd.Process.Kill()
	_ = c.cmd.Wait()
}
