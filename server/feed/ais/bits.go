package ais

import (
	"errors"
	"fmt"
	"strings"
)

// ErrMessage is wrapped when a message cannot be read.
var ErrMessage = errors.New("not an AIS message")

// maxBits bounds a message: five slots hold 1064 bits; a little more is taken.
const maxBits = 1200

// bits is a message as a string of bits, one a byte: messages are short, and
// reading them is rare.
type bits []byte

// unarmour turns the six-bit armour of a payload into bits: each character
// minus 48, and 8 more when that is above 40.
func unarmour(payload string, fill int) (bits, error) {
	if fill < 0 || fill > 5 || len(payload)*6 > maxBits+5 {
		return nil, fmt.Errorf("%w: %d characters, %d fill bits", ErrMessage, len(payload), fill)
	}
	b := make(bits, 0, len(payload)*6)
	for i := range len(payload) {
		c := payload[i]
		v := int(c) - 48
		if v > 40 {
			v -= 8
		}
		if c < 48 || c > 87 && c < 96 || c > 119 {
			return nil, fmt.Errorf("%w: character %q in the payload", ErrMessage, c)
		}
		for shift := 5; shift >= 0; shift-- {
			b = append(b, byte(v>>shift&1))
		}
	}
	if fill > len(b) {
		return nil, fmt.Errorf("%w: no payload", ErrMessage)
	}
	return b[:len(b)-fill], nil
}

// uint reads n bits from a position; what lies beyond the end reads as zero.
func (b bits) uint(at, n int) uint64 {
	var v uint64
	for i := at; i < at+n; i++ {
		v <<= 1
		if i < len(b) {
			v |= uint64(b[i])
		}
	}
	return v
}

// int reads n bits in two's complement.
func (b bits) int(at, n int) int64 {
	v := int64(b.uint(at, n))
	if v >= 1<<(n-1) {
		v -= 1 << n
	}
	return v
}

// text reads n six-bit characters, up to the first @, without blanks at the end.
func (b bits) text(at, n int) string {
	var s strings.Builder
	for i := range n {
		if at+i*6+6 > len(b) {
			break
		}
		c := byte(b.uint(at+i*6, 6))
		if c < 32 {
			c += 64
		}
		if c == '@' {
			break
		}
		s.WriteByte(c)
	}
	return strings.TrimRight(s.String(), " ")
}
