package demo

import (
	"net"
	"slices"
	"sync"
	"time"
)

// speaker sends what the instruments say to whoever listens.
type speaker struct {
	ln net.Listener

	mu        sync.Mutex // guards listeners and closed
	listeners []net.Conn
	closed    bool
}

func newSpeaker(ln net.Listener) *speaker { return &speaker{ln: ln} }

// accept takes listeners until the speaker is closed.
func (s *speaker) accept() {
	for {
		c, err := s.ln.Accept()
		if err != nil {
			return
		}
		s.mu.Lock()
		if s.closed {
			c.Close()
		} else {
			s.listeners = append(s.listeners, c)
		}
		s.mu.Unlock()
	}
}

// patience is how long a listener may take to read a second of sentences;
// whoever is slower is dropped and may come again.
const patience = 500 * time.Millisecond

func (s *speaker) say(lines string) {
	s.mu.Lock()
	defer s.mu.Unlock()
	s.listeners = slices.DeleteFunc(s.listeners, func(c net.Conn) bool {
		_ = c.SetWriteDeadline(time.Now().Add(patience))
		if _, err := c.Write([]byte(lines)); err != nil {
			c.Close()
			return true
		}
		return false
	})
}

func (s *speaker) close() {
	s.ln.Close()
	s.mu.Lock()
	defer s.mu.Unlock()
	s.closed = true
	for _, c := range s.listeners {
		c.Close()
	}
	s.listeners = nil
}
