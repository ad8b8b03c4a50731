package nav

import (
	"strconv"
	"strings"
	"unicode"
	"unicode/utf8"
)

// tokenKind is what a piece of a typed position is.
type tokenKind uint8

const (
	tokNumber    tokenKind = iota // 54 or 06.00, always without sign
	tokDegree                     // ° and its look-alikes, "deg"
	tokMinute                     // ' and its look-alikes, "min"
	tokSecond                     // " and its look-alikes, "sec"
	tokLetter                     // N S E W, held in text in upper case
	tokPlus                       // an explicit plus sign
	tokMinus                      // a minus sign, not the hyphen of 54-06
	tokJoin                       // the hyphen or colon inside 54-06.0 and 54:06.0
	tokSeparator                  // , ; or / in text
	tokLabel                      // "lat" or "lon" in text
)

// token is one piece of a typed position.
type token struct {
	kind     tokenKind
	text     string // number: digits with a point for the decimal mark
	whole    int    // number: how many digits before the decimal mark
	fraction bool   // number: has a decimal mark
	apart    bool   // minus: white space before it and a digit behind it, so no hyphen
}

// scanner cuts a typed position into tokens. The first problem stops it.
type scanner struct {
	src     string
	at      int
	toks    []token
	problem string
}

// scanPosition returns the tokens, or what is wrong.
func scanPosition(src string) ([]token, string) {
	s := scanner{src: src, toks: make([]token, 0, 16)}
	for s.problem == "" && s.at < len(src) {
		s.next()
	}
	return s.toks, s.problem
}

func (s *scanner) fail(problem string) {
	if s.problem == "" {
		s.problem = problem
	}
}

func (s *scanner) emit(kind tokenKind, text string) {
	s.toks = append(s.toks, token{kind: kind, text: text})
}

// next takes one token, or white space.
func (s *scanner) next() {
	r, size := utf8.DecodeRuneInString(s.src[s.at:])
	kind, isMark := markOf(r)
	switch {
	case isSpace(r):
		s.at += size
	case isDigit(r):
		s.number()
	case isMark:
		s.at += size
		s.mark(kind)
	case isDash(r):
		s.at += size
		s.dash(size)
	case r == '+':
		s.at += size
		s.emit(tokPlus, "+")
	case r == ':' && s.between(size):
		s.at += size
		s.emit(tokJoin, ":")
	case r == ',' || r == ';' || r == '/':
		s.at += size
		s.emit(tokSeparator, string(r))
	case unicode.IsLetter(r):
		s.word()
	case r == '.':
		s.fail("a decimal point must stand between two digits")
	default:
		s.fail("the character " + strconv.QuoteRune(r) + " does not belong in a position")
	}
}

// mark adds a unit mark; two minute marks in a row are a second mark.
func (s *scanner) mark(kind tokenKind) {
	if n := len(s.toks); kind == tokMinute && n > 0 && s.toks[n-1].kind == tokMinute {
		s.toks[n-1] = token{kind: tokSecond, text: "''"}
		return
	}
	s.emit(kind, "")
}

// dash tells the hyphen of 54-06.0 from a sign. A number with a fraction ends
// a coordinate, so what follows it can only be a sign.
func (s *scanner) dash(size int) {
	s.at -= size
	joined := s.between(size)
	s.at += size
	if joined && !s.toks[len(s.toks)-1].fraction {
		s.emit(tokJoin, "-")
		return
	}
	before, _ := utf8.DecodeLastRuneInString(s.src[:s.at-size])
	apart := isSpace(before) && s.digitAt(s.at)
	s.toks = append(s.toks, token{kind: tokMinus, text: "-", apart: apart})
}

// between reports whether the rune of this size at the cursor stands directly
// between two digits.
func (s *scanner) between(size int) bool {
	return s.at > 0 && isDigit(rune(s.src[s.at-1])) && s.digitAt(s.at+size)
}

func (s *scanner) digitAt(i int) bool { return i < len(s.src) && isDigit(rune(s.src[i])) }

// digits returns the end of the run of digits that starts at i.
func (s *scanner) digits(i int) int {
	for s.digitAt(i) {
		i++
	}
	return i
}

// maxDigits keeps numbers to what a person may type: a longer one is garbage.
const maxDigits = 24

// number takes digits and, if there is one, the fraction.
func (s *scanner) number() {
	end := s.digits(s.at)
	tok := token{kind: tokNumber, text: s.src[s.at:end], whole: end - s.at}
	switch {
	case end < len(s.src) && s.src[end] == '.':
		tail := s.digits(end + 1)
		if tail == end+1 || (tail < len(s.src) && s.src[tail] == '.') {
			s.fail("a decimal point must stand between two digits, and once in a number: " + clip(s.src[s.at:], 20))
			return
		}
		tok.text, tok.fraction, end = s.src[s.at:tail], true, tail
	case s.commaIsDecimal(end):
		tail := s.digits(end + 1)
		tok.text, tok.fraction, end = tok.text+"."+s.src[end+1:tail], true, tail
	}
	if len(tok.text) > maxDigits {
		s.fail("a number has too many digits: " + clip(tok.text, 20))
		return
	}
	s.at = end
	s.toks = append(s.toks, tok)
}

// commaIsDecimal reports whether the comma at i is a decimal mark without
// doubt: between digits, with a degree, minute or second mark behind them.
func (s *scanner) commaIsDecimal(i int) bool {
	if i >= len(s.src) || s.src[i] != ',' || !s.digitAt(i+1) {
		return false
	}
	for j := s.digits(i + 1); j < len(s.src); {
		r, size := utf8.DecodeRuneInString(s.src[j:])
		if !isSpace(r) {
			_, isMark := markOf(r)
			return isMark
		}
		j += size
	}
	return false
}

// word takes a run of letters: a hemisphere, a label or a unit in words.
func (s *scanner) word() {
	end := s.at
	for end < len(s.src) {
		r, size := utf8.DecodeRuneInString(s.src[end:])
		if _, isMark := markOf(r); isMark || !unicode.IsLetter(r) {
			break
		}
		end += size
	}
	text := s.src[s.at:end]
	s.at = end
	lower := strings.ToLower(text)
	for _, w := range words {
		if !holdsWord(w.spelt, lower) {
			continue
		}
		switch w.kind {
		case tokLetter:
			s.emit(tokLetter, w.text)
		case tokLabel:
			s.label(w.text)
		default:
			s.mark(w.kind)
		}
		return
	}
	if holdsWord("o ost oeste ouest ovest oost oest", lower) {
		s.fail(strconv.Quote(text) + " means east in one language and west in another: write E or W")
		return
	}
	s.fail(strconv.Quote(clip(text, 20)) + " is not one of the letters N, S, E, W")
}

// words are the words of a position, in lower case, spaces between them.
var words = [...]struct {
	spelt string
	kind  tokenKind
	text  string
}{
	{"n north", tokLetter, "N"},
	{"s south", tokLetter, "S"},
	{"e east", tokLetter, "E"},
	{"w west", tokLetter, "W"},
	{"lat latitude", tokLabel, "lat"},
	{"lon long lng longitude", tokLabel, "lon"},
	{"deg degree degrees", tokDegree, ""},
	{"min minute minutes", tokMinute, ""},
	{"sec second seconds", tokSecond, ""},
}

// holdsWord reports whether a word, of letters only, is in a list.
func holdsWord(list, word string) bool {
	return strings.Contains(" "+list+" ", " "+word+" ")
}

// label adds "lat" or "lon" and takes the colon or equals sign behind it.
func (s *scanner) label(text string) {
	s.emit(tokLabel, text)
	if s.at < len(s.src) && (s.src[s.at] == ':' || s.src[s.at] == '=') {
		s.at++
	}
}

func isDigit(r rune) bool { return r >= '0' && r <= '9' }

// isSpace also takes the invisible characters that come along when a position
// is copied from a web page: zero-width space and no-break space, and the
// left-to-right and right-to-left marks.
func isSpace(r rune) bool {
	return unicode.IsSpace(r) || r == '\u200B' || r == '\uFEFF' || r == '\u200E' || r == '\u200F'
}

// isDash takes the hyphens, the en dash and the minus sign of Unicode.
func isDash(r rune) bool {
	return r == '-' || r == '\u2010' || r == '\u2011' || r == '\u2013' || r == '\u2212'
}

// markOf returns the unit that a mark stands for. Besides the right characters
// it takes those that keyboards and word processors put in their place.
func markOf(r rune) (tokenKind, bool) {
	switch r {
	case '°', 'º', '\u02DA': // degree sign, masculine ordinal, ring above
		return tokDegree, true
	case '\'', '\u2032', '\u2019', '\u2018', '\u00B4', '`', '\u02B9': // prime, single quotes, accents, modifier prime
		return tokMinute, true
	case '"', '\u2033', '\u201D', '\u201C', '\u02BA': // double prime, double quotes, modifier double prime
		return tokSecond, true
	}
	return 0, false
}
