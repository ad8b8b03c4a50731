package nav

import (
	"math"
	"testing"

	"pgregory.net/rapid"
)

func TestFigures(t *testing.T) {
	tests := []struct{ got, want string }{
		{TrueDeg(283).Figures(), "283"},
		{TrueDeg(7).String(), "007T"},
		{TrueDeg(359.6).String(), "000T"},
		{TrueDeg(360).Figures(), "000"},
		{TrueDeg(-1).Figures(), "359"},
		{MagneticDeg(92.4).String(), "092M"},
		{MagneticDeg(0).Figures(), "000"},
		{TrueDeg(math.NaN()).Figures(), "---"},
		{TrueDeg(math.Inf(1)).String(), "---T"},
		{SpokenFigures("283"), "two eight three"},
		{SpokenFigures("6.5 kn"), "six decimal five"},
		{SpokenFigures(""), ""},
	}
	for _, tc := range tests {
		if tc.got != tc.want {
			t.Errorf("got %q, want %q", tc.got, tc.want)
		}
	}
}

func TestWordsRange(t *testing.T) {
	tests := []struct {
		rangeM float64
		want   string
	}{
		{0, "0 m"}, {0.4, "0 m"}, {84.4, "84 m"}, {99.4, "99 m"}, {99.6, "100 m"},
		{104, "100 m"}, {220, "220 m"}, {370, "370 m"},
		{370.4, "0.20 nm"}, // 0.2 * 1852
		{407.4, "0.22 nm"}, {777.8, "0.42 nm"}, {1852, "1.00 nm"},
		{9.99 * 1852, "9.99 nm"}, {9.996 * 1852, "10.0 nm"}, {12.5 * 1852, "12.5 nm"},
		{99.96 * 1852, "100 nm"}, {20_003_931, "10801 nm"},
		{-1, "range unknown"}, {math.NaN(), "range unknown"}, {math.Inf(1), "range unknown"},
	}
	for _, tc := range tests {
		if got := WordsRange(tc.rangeM); got != tc.want {
			t.Errorf("WordsRange(%v) = %q, want %q", tc.rangeM, got, tc.want)
		}
	}
}

func TestWordsRelative(t *testing.T) {
	tests := []struct {
		r    RelativeDeg
		want string
	}{
		{0, "dead ahead"}, {2.4, "dead ahead"}, {-2.4, "dead ahead"},
		{2.6, "5 degrees to starboard"}, {-40, "40 degrees to port"}, {-38, "40 degrees to port"},
		{90, "90 degrees to starboard"}, {177, "175 degrees to starboard"},
		{178, "astern"}, {-178, "astern"}, {180, "astern"}, {320, "40 degrees to port"},
		{RelativeDeg(math.NaN()), "direction unknown"},
	}
	for _, tc := range tests {
		if got := WordsRelative(tc.r); got != tc.want {
			t.Errorf("WordsRelative(%v) = %q, want %q", float64(tc.r), got, tc.want)
		}
	}
}

// TestWordsRelativeMirrors checks that port and starboard are never mixed up.
func TestWordsRelativeMirrors(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		deg := rapid.Float64Range(3, 177).Draw(t, "deg")
		starboard, port := WordsRelative(RelativeDeg(deg)), WordsRelative(RelativeDeg(-deg))
		const s, p = " to starboard", " to port"
		if len(starboard) < len(s) || len(port) < len(p) || starboard[:len(starboard)-len(s)]+p != port {
			t.Fatalf("%v: %q and %q are no mirror images", deg, starboard, port)
		}
	})
}
