package nav

// Problems that more than one place meets.
const (
	problemHalf  = "only one coordinate was found: latitude and longitude are both needed"
	problemSplit = "it cannot be told where the latitude ends and the longitude begins"
	problemComma = "a comma here may be a decimal mark or stand between two numbers: write a point as the decimal mark"
)

// splitCoordinates cuts the tokens into the two coordinates, or says why not.
func splitCoordinates(toks []token) (first, second []token, problem string) {
	if len(toks) == 0 {
		return nil, nil, "nothing was given"
	}
	if count(toks, tokNumber) == 0 {
		return nil, nil, "there are no figures in it"
	}
	if count(toks, tokNumber) == 1 {
		return nil, nil, problemHalf
	}
	var at int
	switch {
	case count(toks, tokLetter) > 0:
		at, problem = splitAtLetters(toks)
	case count(toks, tokLabel) > 0:
		at, problem = splitAtLabels(toks)
	default:
		toks = trimSolidus(toks)
		at, problem = splitPlain(toks)
	}
	if problem != "" {
		return nil, nil, problem
	}
	first, second = trimSeparators(toks[:at]), trimSeparators(toks[at:])
	if count(first, tokNumber) == 0 || count(second, tokNumber) == 0 {
		return nil, nil, problemHalf
	}
	return first, second, ""
}

// splitAtLetters works on "54 06N 7 54E" and "N54 06 E7 54".
func splitAtLetters(toks []token) (int, string) {
	if count(toks, tokLetter) != 2 {
		return 0, "there must be one of N, S and one of E, W, once each"
	}
	one := index(toks, tokLetter, 0)
	two := index(toks, tokLetter, one+1)
	const mixed = "the letters must stand both before or both after their figures"
	if firstOf(toks) == tokLetter { // letters in front
		if two == len(toks)-1 {
			return 0, mixed
		}
		if two > 0 && toks[two-1].kind == tokLabel {
			return two - 1, ""
		}
		return two, ""
	}
	if two != len(toks)-1 {
		return 0, mixed
	}
	return one + 1, ""
}

// firstOf is the kind of the first token that is no label.
func firstOf(toks []token) tokenKind {
	for _, t := range toks {
		if t.kind != tokLabel {
			return t.kind
		}
	}
	return tokLabel
}

// splitAtLabels works on "lat 54.1 lon 7.9".
func splitAtLabels(toks []token) (int, string) {
	if count(toks, tokLabel) != 2 || toks[0].kind != tokLabel {
		return 0, "lat and lon must stand before their figures, once each"
	}
	return index(toks, tokLabel, 1), ""
}

// splitPlain works without letters: at the one separator, at the second sign
// of two, at the second degree mark of two, or between two decimal numbers.
func splitPlain(toks []token) (int, string) {
	switch separators := count(toks, tokSeparator); {
	case separators > 1:
		return 0, problemComma
	case separators == 1:
		at := index(toks, tokSeparator, 0)
		if toks[at].text == "/" {
			return 0, "figures apart by / may be a direction and a speed: write a comma, or letters"
		}
		return at, ""
	}
	if at := secondSign(toks); at > 0 {
		return at, ""
	}
	if count(toks, tokDegree) == 2 {
		return beforeSecondDegree(toks), ""
	}
	if at := betweenDecimals(toks); at > 0 {
		return at, ""
	}
	return 0, problemSplit
}

// betweenDecimals is the start of the second of two numbers that both have a
// fraction (54.1 7.9, 54.1 -7.9): the first can have no minutes behind it.
func betweenDecimals(toks []token) int {
	n := index(toks, tokNumber, 0)
	if count(toks, tokNumber) != 2 || !toks[n].fraction {
		return 0
	}
	next := index(toks, tokNumber, n+1)
	switch {
	case !toks[next].fraction:
		return 0
	case next == n+1:
		return next
	case next == n+2 && toks[n+1].apart:
		return n + 1
	}
	return 0
}

// secondSign is where the second of two signs stands, if the first opens the
// position: the sign begins the second coordinate then.
func secondSign(toks []token) int {
	if !toks[0].isSign() || count(toks, tokPlus)+count(toks, tokMinus) != 2 {
		return 0
	}
	for i := 1; i < len(toks); i++ {
		if toks[i].isSign() {
			return i
		}
	}
	return 0
}

// beforeSecondDegree is the start of the second of two numbers that have a
// degree mark, its sign included.
func beforeSecondDegree(toks []token) int {
	at := index(toks, tokDegree, index(toks, tokDegree, 0)+1) - 1
	if at > 0 && toks[at-1].isSign() {
		at--
	}
	return max(at, 0)
}

// trimSolidus drops the / that ends a position in ISO 6709 (+54.1+007.9/).
func trimSolidus(toks []token) []token {
	if n := len(toks); n > 1 && toks[0].isSign() && toks[n-1].kind == tokSeparator && toks[n-1].text == "/" {
		return toks[:n-1]
	}
	return toks
}

// trimSeparators drops one separator at each end, and the one between figures
// and their letter (5406.00,N).
func trimSeparators(toks []token) []token {
	if len(toks) > 0 && toks[0].kind == tokSeparator {
		toks = toks[1:]
	}
	if n := len(toks); n > 0 && toks[n-1].kind == tokSeparator {
		toks = toks[:n-1]
	}
	if n := len(toks); n > 2 && toks[n-1].kind == tokLetter && toks[n-2].kind == tokSeparator {
		toks = append(append([]token(nil), toks[:n-2]...), toks[n-1])
	}
	return toks
}

func (t token) isSign() bool { return t.kind == tokPlus || t.kind == tokMinus }

func count(toks []token, kind tokenKind) int {
	n := 0
	for _, t := range toks {
		if t.kind == kind {
			n++
		}
	}
	return n
}

// index is the first token of a kind at or after from, or -1.
func index(toks []token, kind tokenKind, from int) int {
	for i := from; i < len(toks); i++ {
		if toks[i].kind == kind {
			return i
		}
	}
	return -1
}
