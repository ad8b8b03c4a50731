//go:build !js

package incident

import (
	"bytes"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"math"
	"slices"
	"sort"
	"strconv"
	"unicode/utf16"
)

// maxDepth bounds the nesting of a body, so that no sender can exhaust the
// stack. Our choice: no body of ours nests deeper than four.
const maxDepth = 32

// ErrCanonical is wrapped by the errors of canonical JSON.
var ErrCanonical = errors.New("not canonical JSON")

// appendCanonicalJSON appends data in the canonical form of RFC 8785: no
// white space, members sorted by their UTF-16 code units, numbers as
// ECMAScript prints them, strings with the fewest escapes. A browser makes the
// same bytes with JSON.stringify on sorted members.
func appendCanonicalJSON(dst, data []byte) ([]byte, error) {
	dec := json.NewDecoder(bytes.NewReader(data))
	dec.UseNumber()
	var v any
	if err := dec.Decode(&v); err != nil {
		return dst, fmt.Errorf("%w: %v", ErrCanonical, err)
	}
	if _, err := dec.Token(); !errors.Is(err, io.EOF) {
		return dst, fmt.Errorf("%w: more than one value", ErrCanonical)
	}
	return appendValue(dst, v, 0)
}

func appendValue(dst []byte, v any, depth int) ([]byte, error) {
	if depth > maxDepth {
		return dst, fmt.Errorf("%w: nested deeper than %d", ErrCanonical, maxDepth)
	}
	switch v := v.(type) {
	case nil:
		return append(dst, "null"...), nil
	case bool:
		return strconv.AppendBool(dst, v), nil
	case string:
		return appendString(dst, v), nil
	case json.Number:
		return appendNumber(dst, v)
	case []any:
		return appendArray(dst, v, depth)
	case map[string]any:
		return appendObject(dst, v, depth)
	}
	return dst, fmt.Errorf("%w: unexpected %T", ErrCanonical, v)
}

func appendArray(dst []byte, items []any, depth int) ([]byte, error) {
	dst = append(dst, '[')
	for i, item := range items {
		if i > 0 {
			dst = append(dst, ',')
		}
		var err error
		if dst, err = appendValue(dst, item, depth+1); err != nil {
			return dst, err
		}
	}
	return append(dst, ']'), nil
}

func appendObject(dst []byte, members map[string]any, depth int) ([]byte, error) {
	keys := make([]string, 0, len(members))
	for k := range members {
		keys = append(keys, k)
	}
	sort.Slice(keys, func(i, j int) bool {
		return slices.Compare(utf16.Encode([]rune(keys[i])), utf16.Encode([]rune(keys[j]))) < 0
	})
	dst = append(dst, '{')
	for i, k := range keys {
		if i > 0 {
			dst = append(dst, ',')
		}
		dst = append(appendString(dst, k), ':')
		var err error
		if dst, err = appendValue(dst, members[k], depth+1); err != nil {
			return dst, err
		}
	}
	return append(dst, '}'), nil
}

// appendNumber prints a number as ECMAScript does (ECMA-262, Number::toString),
// which is what encoding/json does but for the sign of zero.
func appendNumber(dst []byte, n json.Number) ([]byte, error) {
	f, err := strconv.ParseFloat(n.String(), 64)
	if err != nil || math.IsInf(f, 0) {
		return dst, fmt.Errorf("%w: number %s is out of range", ErrCanonical, n)
	}
	if f == 0 {
		return append(dst, '0'), nil
	}
	text, err := json.Marshal(f)
	if err != nil {
		return dst, fmt.Errorf("%w: number %s: %v", ErrCanonical, n, err)
	}
	return append(dst, text...), nil
}

func appendString(dst []byte, s string) []byte {
	const hex = "0123456789abcdef"
	dst = append(dst, '"')
	for _, r := range s {
		switch {
		case r == '"' || r == '\\':
			dst = append(dst, '\\', byte(r))
		case r == '\b':
			dst = append(dst, '\\', 'b')
		case r == '\t':
			dst = append(dst, '\\', 't')
		case r == '\n':
			dst = append(dst, '\\', 'n')
		case r == '\f':
			dst = append(dst, '\\', 'f')
		case r == '\r':
			dst = append(dst, '\\', 'r')
		case r < 0x20:
			dst = append(dst, '\\', 'u', '0', '0', hex[r>>4], hex[r&0xf])
		default:
			dst = append(dst, string(r)...)
		}
	}
	return append(dst, '"')
}
