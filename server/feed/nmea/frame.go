package nmea

import (
	"fmt"
	"strings"
)

// MaxLine is the longest line that is read, in bytes, line end included. The
// standard's limit is 82, but a fully filled MOB sentence has 85 and a tag block
// comes before the sentence. 512 is our choice, because it holds the longest of
// these many times over and still bounds what a broken talker can make us keep.
const MaxLine = 512

// Start characters of a sentence.
const (
	Parametric   = '$' // fields as text
	Encapsulated = '!' // fields that carry packed bits: VDM, VDO
)

// Sentence is one framed line. The strings are parts of the line given.
type Sentence struct {
	Start     byte   // [Parametric] or [Encapsulated]
	Talker    string // "GP"; "P" for a maker's own sentence
	Formatter string // "RMC"; for a maker's own sentence all after the P
	// Data is all fields after the address, with their commas, without the
	// first comma; "" when there are none.
	Data string
	// Checked says that the line carried a checksum (and that it was right).
	Checked bool
}

// ChecksumRule says what to do with a line that carries no checksum. A wrong
// checksum is refused under every rule.
type ChecksumRule uint8

const (
	// ChecksumRequired refuses a line without one. It is the rule unless a feed
	// asks for the other, because a line that lost its end on a noisy cable looks
	// exactly like one that never had a checksum.
	ChecksumRequired ChecksumRule = iota
	// ChecksumOptional takes such a line, for an old instrument that never sends
	// one.
	ChecksumOptional
)

// Frame finds the sentence in a line and proves its checksum.
//
// Line ends, spaces and NUL bytes around it are dropped, and a tag block
// (\...\) before it is skipped unread. Where a line holds a second start
// character, the sentence begins at the last one: the line end between two
// sentences was lost, and the checksum decides whether the rest is whole.
func Frame(line string, rule ChecksumRule) (Sentence, error) {
	if len(line) > MaxLine {
		return Sentence{}, fmt.Errorf("%w: %d bytes, expected at most %d", ErrMalformed, len(line), MaxLine)
	}
	body, err := unwrap(line)
	if err != nil {
		return Sentence{}, err
	}
	star, sum, err := scan(body)
	if err != nil {
		return Sentence{}, err
	}
	if err := prove(body, star, sum, rule); err != nil {
		return Sentence{}, err
	}
	s, err := address(body[:star])
	s.Checked = star < len(body)
	return s, err
}

// unwrap strips what surrounds a sentence and returns it from its start
// character on.
func unwrap(line string) (string, error) {
	line = trim(line)
	if line == "" {
		return "", fmt.Errorf("%w: empty line", ErrMalformed)
	}
	if line[0] == '\\' {
		end := strings.IndexByte(line[1:], '\\')
		if end < 0 {
			return "", fmt.Errorf(`%w: tag block without its closing \`, ErrMalformed)
		}
		line = line[end+2:]
	}
	if line == "" || line[0] != Parametric && line[0] != Encapsulated {
		return "", fmt.Errorf("%w: expected $ or ! at the start", ErrMalformed)
	}
	return line[lastStart(line):], nil
}

// lastStart is where the last start character stands.
func lastStart(line string) int {
	for i := len(line) - 1; i > 0; i-- {
		if line[i] == Parametric || line[i] == Encapsulated {
			return i
		}
	}
	return 0
}

func trim(s string) string {
	for s != "" && (s[0] <= ' ') {
		s = s[1:]
	}
	for s != "" && (s[len(s)-1] <= ' ') {
		s = s[:len(s)-1]
	}
	return s
}

// scan walks over a sentence once. It returns where the checksum begins (or the
// length, when there is none) and the exclusive or of all bytes between start
// character and there.
func scan(s string) (star int, sum byte, err error) {
	for i := 1; i < len(s); i++ {
		c := s[i]
		if c == '*' {
			return i, sum, nil
		}
		if c < ' ' || c > '~' {
			return 0, 0, fmt.Errorf("%w: byte %#02x is not printable ASCII", ErrMalformed, c)
		}
		sum ^= c
	}
	return len(s), sum, nil
}

func prove(s string, star int, sum byte, rule ChecksumRule) error {
	given := s[star:]
	if given == "" {
		if rule == ChecksumOptional {
			return nil
		}
		return fmt.Errorf("%w: expected *%02X at the end", ErrNoChecksum, sum)
	}
	if len(given) != 3 {
		return fmt.Errorf("%w: %q at the end, expected * and two hexadecimal digits", ErrMalformed, clip(given))
	}
	hi, lo := hexDigit(given[1]), hexDigit(given[2])
	if hi < 0 || lo < 0 {
		return fmt.Errorf("%w: %q at the end, expected * and two hexadecimal digits", ErrMalformed, given)
	}
	if byte(hi<<4|lo) != sum {
		return fmt.Errorf("%w: %s at the end, expected *%02X", ErrChecksum, given, sum)
	}
	return nil
}

func hexDigit(c byte) int {
	switch {
	case c >= '0' && c <= '9':
		return int(c - '0')
	case c >= 'A' && c <= 'F':
		return int(c-'A') + 10
	case c >= 'a' && c <= 'f':
		return int(c-'a') + 10
	}
	return -1
}

// address splits "$GPRMC,..." into its parts.
func address(s string) (Sentence, error) {
	addr, data, _ := strings.Cut(s[1:], ",")
	out := Sentence{Start: s[0], Data: data}
	for i := 0; i < len(addr); i++ {
		if !isAddressByte(addr[i]) {
			return Sentence{}, fmt.Errorf("%w: address %q, expected capital letters and digits", ErrMalformed, clip(addr))
		}
	}
	switch {
	case len(addr) >= 2 && addr[0] == 'P':
		out.Talker, out.Formatter = addr[:1], addr[1:]
	case len(addr) == 5:
		out.Talker, out.Formatter = addr[:2], addr[2:]
	default:
		return Sentence{}, fmt.Errorf("%w: address %q, expected two letters of the talker and three of the sentence", ErrMalformed, clip(addr))
	}
	return out, nil
}

func isAddressByte(c byte) bool { return c >= 'A' && c <= 'Z' || c >= '0' && c <= '9' }

// clip keeps what a bad line puts into an error short.
func clip(s string) string {
	const most = 24
	if len(s) > most {
		return s[:most] + "..."
	}
	return s
}
