package nav_test

import (
	"fmt"

	"wakeback/drift/nav"
)

func ExampleParsePosition() {
	p, err := nav.ParsePosition("S33 51.5 E151 12.9")
	fmt.Println(p, err)
	_, err = nav.ParsePosition("54,1 7,9")
	fmt.Println(err)
	// Output:
	// 33°51.500'S 151°12.900'E <nil>
	// not a position: "54,1 7,9": a comma here may be a decimal mark or stand between two numbers: write a point as the decimal mark; expected a form like 54.1,7.9 or 54 06.00N 007 54.00E or 54°06'00"N 7°54'00"E
}

func ExampleSpoken() {
	for _, line := range nav.Spoken(nav.PositionFromDegrees(54.1, 7.9)) {
		fmt.Println(line)
	}
	// Output:
	// five four degrees, zero six decimal zero zero minutes, North
	// zero zero seven degrees, five four decimal zero zero minutes, East
}

func ExampleWordsRelative() {
	heading := nav.True(90)
	fmt.Println(nav.WordsRelative(nav.True(50).RelativeTo(heading))+",", nav.WordsRange(220))
	// Output: 40 degrees to port, 220 m
}
