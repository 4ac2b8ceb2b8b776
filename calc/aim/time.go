package aim

import "math"

// Instant is a time in seconds of UTC since 1970-01-01, leap seconds not
// counted.
type Instant float64

// Date returns the instant of a civil date and time of day in UTC.
//
// The count of days is that of the proleptic Gregorian calendar: years begin in
// March, so that the leap day is the last of its year.
func Date(year, month, day int, secondOfDay float64) Instant {
	if month <= 2 {
		year, month = year-1, month+12
	}
	days := 365*year + floorDiv(year, 4) - floorDiv(year, 100) + floorDiv(year, 400) + (153*(month-3)+2)/5 + day - 1
	const toEpoch = 719468 // days from 0000-03-01 to 1970-01-01
	return Instant(float64(days-toEpoch)*86400 + secondOfDay)
}

func floorDiv(a, b int) int {
	q := a / b
	if a%b < 0 {
		q--
	}
	return q
}

// Leap tells whether a year of the Gregorian calendar has a leap day.
func Leap(year int) bool { return year%4 == 0 && (year%100 != 0 || year%400 == 0) }

// DaysIn is the length of a month of 1 to 12.
func DaysIn(year, month int) int {
	switch month {
	case 2:
		if Leap(year) {
			return 29
		}
		return 28
	case 4, 6, 9, 11:
		return 30
	}
	return 31
}

// DecimalYear is the year with its elapsed part, as magnetic models count time:
// 1 January 0 h is exactly the year.
func (t Instant) DecimalYear() float64 {
	year := int(math.Floor(1970 + float64(t)/(365.2425*86400)))
	for Date(year+1, 1, 1, 0) <= t {
		year++
	}
	for Date(year, 1, 1, 0) > t {
		year--
	}
	from, to := Date(year, 1, 1, 0), Date(year+1, 1, 1, 0)
	return float64(year) + float64(t-from)/float64(to-from)
}

// JulianDay is the Julian date of the instant.
func (t Instant) JulianDay() float64 { return 2440587.5 + float64(t)/86400 }

// ParseDate reads a date like 2026-11-30.
func ParseDate(s string) (Instant, bool) {
	year, month, day, ok := calendarDate(s)
	if !ok || len(s) != 10 {
		return 0, false
	}
	return Date(year, month, day, 0), true
}

// ParseTime reads a time of RFC 3339 with its offset, like
// 2026-11-30T09:12:00+01:00. A leap second is read as the second after it.
func ParseTime(s string) (Instant, bool) {
	year, month, day, ok := calendarDate(s)
	if !ok || len(s) < 20 || s[10] != 'T' && s[10] != 't' || s[13] != ':' || s[16] != ':' {
		return 0, false
	}
	hour, okH := digits(s[11:13])
	minute, okM := digits(s[14:16])
	second, okS := digits(s[17:19])
	if !okH || !okM || !okS || hour > 23 || minute > 59 || second > 60 {
		return 0, false
	}
	seconds := float64(hour*3600 + minute*60 + second)
	rest := s[19:]
	if rest[0] == '.' {
		n, part := 1, 0.1
		for ; n < len(rest) && rest[n] >= '0' && rest[n] <= '9'; n++ {
			seconds += float64(rest[n]-'0') * part
			part /= 10
		}
		if n == 1 {
			return 0, false
		}
		rest = rest[n:]
	}
	switch {
	case rest == "Z" || rest == "z":
	case len(rest) == 6 && (rest[0] == '+' || rest[0] == '-') && rest[3] == ':':
		h, okH := digits(rest[1:3])
		m, okM := digits(rest[4:6])
		if !okH || !okM || h > 23 || m > 59 {
			return 0, false
		}
		offset := float64(h*3600 + m*60)
		if rest[0] == '+' {
			offset = -offset
		}
		seconds += offset
	default:
		return 0, false
	}
	return Date(year, month, day, seconds), true
}

func calendarDate(s string) (year, month, day int, ok bool) {
	if len(s) < 10 || s[4] != '-' || s[7] != '-' {
		return 0, 0, 0, false
	}
	year, okY := digits(s[0:4])
	month, okM := digits(s[5:7])
	day, okD := digits(s[8:10])
	ok = okY && okM && okD && month >= 1 && month <= 12 && day >= 1 && day <= DaysIn(year, month)
	return year, month, day, ok
}

func digits(s string) (int, bool) {
	n := 0
	for i := 0; i < len(s); i++ {
		if s[i] < '0' || s[i] > '9' {
			return 0, false
		}
		n = 10*n + int(s[i]-'0')
	}
	return n, true
}
