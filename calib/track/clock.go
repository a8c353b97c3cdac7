package track

import (
	"strconv"
	"strings"
	"time"
)

// clockBase is the day from which date stamps are counted, so that seconds keep
// their digits.
type clockBase struct {
	day   int64 // days since 1970-01-01
	dated bool
}

// stamp is a date, a time of day, or both.
type stamp struct {
	day     int64 // days since 1970-01-01
	dated   bool
	second  float64 // of the day [s]
	clocked bool
	digits  int // decimals of the seconds
}

const notClock = "is no date or time of day"

// seconds reads a stamp as seconds since the base day.
func (c clockBase) seconds(text string) (float64, error) {
	s, ok := parseClock(trimCell(text))
	if !ok {
		return 0, &fault{notClock, "write time stamps as 2024-05-31T12:30:00.125 or 12:30:00.125"}
	}
	v := s.second
	if s.dated {
		v += float64(s.day-c.day) * 86400
	}
	return v, nil
}

func daysOf(year, month, day int) int64 {
	return time.Date(year, time.Month(month), day, 0, 0, 0, 0, time.UTC).Unix() / 86400
}

// parseClock reads 2024-05-31, 31.05.2024, 31/05/2024, 20240531T..., a time of
// day hh:mm:ss with decimals after a point or a comma, or a date followed by T,
// blank or underscore and a time of day. A zone at the end (Z, +02:00) is
// ignored: only differences count.
func parseClock(s string) (stamp, bool) {
	if len(s) < 5 || len(s) > 40 || s[0] < '0' || s[0] > '9' {
		return stamp{}, false
	}
	afternoon := byte(0)
	if n := len(s); s[n-1]|0x20 == 'm' && (s[n-2]|0x20 == 'a' || s[n-2]|0x20 == 'p') {
		afternoon, s = s[n-2]|0x20, strings.TrimRight(s[:n-2], " \u00a0\u202f")
	}
	at := strings.IndexAny(s, "T _")
	if at < 0 {
		if strings.Contains(s, ":") {
			var out stamp
			ok := out.clock(s)
			return out, ok && out.halve(afternoon)
		}
		var out stamp
		ok := out.date(s)
		return out, ok && afternoon == 0
	}
	var out stamp
	ok := out.date(s[:at]) && out.clock(strings.TrimLeft(s[at+1:], " "))
	return out, ok && out.halve(afternoon)
}

// halve applies a.m. ('a') or p.m. ('p') to a time of day on the 12-hour clock.
func (s *stamp) halve(afternoon byte) bool {
	if afternoon == 0 {
		return true
	}
	if s.second < 3600 || s.second >= 13*3600 {
		return false
	}
	if s.second >= 12*3600 {
		s.second -= 12 * 3600
	}
	if afternoon == 'p' {
		s.second += 12 * 3600
	}
	return true
}

// date reads a date. Where day and month could change places the day comes
// first; a wrong choice shows as a gap of a month at midnight, which is refused.
func (s *stamp) date(text string) bool {
	separator := byte(0)
	for _, c := range []byte("-/.") {
		if strings.Count(text, string(c)) == 2 {
			separator = c
		}
	}
	if separator == 0 {
		return false
	}
	parts := strings.Split(text, string(separator))
	var n [3]int
	for i, part := range parts {
		v, err := strconv.Atoi(part)
		if err != nil || v < 0 || len(part) > 4 {
			return false
		}
		n[i] = v
	}
	year, month, day := n[0], n[1], n[2]
	if len(parts[2]) == 4 {
		day, month, year = n[0], n[1], n[2]
		if separator == '/' && month > 12 {
			day, month = month, day
		}
	} else if len(parts[0]) != 4 {
		return false
	}
	if month < 1 || month > 12 || day < 1 || day > 31 || year < 1900 {
		return false
	}
	s.day, s.dated = daysOf(year, month, day), true
	return true
}

// isZone tells the digits of a distance from universal time: 02, 0200 or 02:00.
func isZone(text string) bool {
	digits := strings.Replace(text, ":", "", 1)
	return (len(text) == 2 || len(digits) == 4 && strings.IndexByte(text+":", ':') != 1) && strings.Trim(digits, "0123456789") == ""
}

// clock reads hh:mm:ss or hh:mm:ss.ffffff.
func (s *stamp) clock(text string) bool {
	text = strings.TrimSuffix(text, "Z")
	if at := strings.LastIndexAny(text, "+-"); at > 5 {
		if !isZone(text[at+1:]) {
			return false
		}
		text = text[:at]
	}
	text = strings.TrimSpace(text)
	parts := strings.Split(text, ":")
	if len(parts) == 4 { // hh:mm:ss:mmm
		if len(parts[3]) != 3 && len(parts[3]) != 6 {
			return false
		}
		parts = []string{parts[0], parts[1], parts[2] + "." + parts[3]}
	}
	if len(parts) == 2 && strings.ContainsAny(parts[1], ".,") { // mm:ss.fff
		parts = []string{"0", parts[0], parts[1]}
	}
	if len(parts) != 3 {
		return false
	}
	hours, err1 := strconv.Atoi(parts[0])
	minutes, err2 := strconv.Atoi(parts[1])
	seconds := strings.Replace(parts[2], ",", ".", 1)
	if seconds == "" || seconds[0] < '0' || seconds[0] > '9' || strings.ContainsAny(seconds, "eExX_") {
		return false
	}
	rest, err3 := strconv.ParseFloat(seconds, 64)
	if err1 != nil || err2 != nil || err3 != nil || hours < 0 || minutes < 0 || minutes > 59 || rest >= 61 {
		return false
	}
	if at := strings.IndexByte(seconds, '.'); at >= 0 {
		s.digits = len(seconds) - at - 1
	}
	s.second, s.clocked = float64(hours*3600+minutes*60)+rest, true
	return true
}
