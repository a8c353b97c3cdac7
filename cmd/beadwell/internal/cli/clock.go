package cli

import (
	"strconv"
	"time"
)

// created is the time that results record, in RFC 3339.
func (a *app) created() (string, error) {
	now, err := a.clock()
	return now.Format(time.RFC3339), err
}

// clock is the time that outputs carry: that of SOURCE_DATE_EPOCH
// (reproducible-builds.org) when it is set, else now.
func (a *app) clock() (time.Time, error) {
	text := a.Getenv("SOURCE_DATE_EPOCH")
	if text == "" {
		return a.Now().UTC(), nil
	}
	seconds, err := strconv.ParseInt(text, 10, 64)
	if err != nil || seconds < 0 || seconds > maxEpoch {
		return time.Time{}, usageError("set it to seconds since 1970, or unset it", "SOURCE_DATE_EPOCH %q is no number of seconds", text)
	}
	return time.Unix(seconds, 0).UTC(), nil
}

// maxEpoch is the last second of the year 9999 [s since 1970], the last that RFC 3339 can write.
const maxEpoch = 253402300799
