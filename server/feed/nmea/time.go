package nmea

import "time"

// TimeOfDay is a time of day in UTC, as the time since midnight, from 0 to less
// than 24 hours and one second: 23:59:60 is a leap second.
type TimeOfDay time.Duration

// Date is a day in UTC.
type Date struct {
	Year  int
	Month time.Month
	Day   int
}

// On is the moment at t on day d. A leap second gives the first second of the
// next day.
func (t TimeOfDay) On(d Date) time.Time {
	return time.Date(d.Year, d.Month, d.Day, 0, 0, 0, 0, time.UTC).Add(time.Duration(t))
}

// Near is the moment at t on the day that brings it nearest to ref: within 12
// hours of it. Sentences without a date are given their day by this rule, with
// ref the last full date and time that the instruments sent, else the time of
// receipt.
func (t TimeOfDay) Near(ref time.Time) time.Time {
	ref = ref.UTC()
	at := t.On(Date{ref.Year(), ref.Month(), ref.Day()})
	switch d := at.Sub(ref); {
	case d > 12*time.Hour:
		return at.AddDate(0, 0, -1)
	case d <= -12*time.Hour:
		return at.AddDate(0, 0, 1)
	}
	return at
}

// twoDigitPivot splits two-digit years: 80 to 99 are 1980 to 1999, 00 to 79 are
// 2000 to 2079. Our choice, because GPS time begins on 6 January 1980, so that
// no satellite receiver can have sent an earlier year.
const twoDigitPivot = 80

func twoDigitYear(yy int) int {
	if yy >= twoDigitPivot {
		return 1900 + yy
	}
	return 2000 + yy
}

// valid reports whether the day exists.
func (d Date) valid() bool {
	if d.Month < 1 || d.Month > 12 || d.Day < 1 {
		return false
	}
	// The day before the first of the next month is the last of this one.
	return d.Day <= time.Date(d.Year, d.Month+1, 0, 0, 0, 0, 0, time.UTC).Day()
}

// parseTimeOfDay reads hhmmss or hhmmss.sss.
func parseTimeOfDay(s string) (TimeOfDay, bool) {
	if len(s) < 6 || len(s) > 6 && s[6] != '.' {
		return 0, false
	}
	h, ok1 := parseDigits(s[0:2])
	m, ok2 := parseDigits(s[2:4])
	if c := s[4]; c < '0' || c > '9' {
		return 0, false // a sign
	}
	sec, ok3 := parseDecimal(s[4:])
	if !ok1 || !ok2 || !ok3 || h > 23 || m > 59 || sec >= 61 {
		return 0, false
	}
	if sec >= 60 && (h != 23 || m != 59) {
		return 0, false // a leap second is the last of a day
	}
	whole := time.Duration(h)*time.Hour + time.Duration(m)*time.Minute
	// Rounded to the microsecond, which is finer than any talker's decimals.
	return TimeOfDay(whole + time.Duration(sec*1e6+0.5)*time.Microsecond), true
}

// parseDate reads ddmmyy.
func parseDate(s string) (Date, bool) {
	n, ok := parseDigits(s)
	if !ok || len(s) != 6 {
		return Date{}, false
	}
	d := Date{Year: twoDigitYear(n % 100), Month: time.Month(n / 100 % 100), Day: n / 10000}
	return d, d.valid()
}
