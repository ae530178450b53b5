package climate

import (
	"errors"
	"fmt"
	"strings"
)

// leapMonthDays are the lengths of the months of a leap year.
var leapMonthDays = [12]int{31, 29, 31, 30, 31, 30, 31, 31, 30, 31, 30, 31}

const (
	leapSlots = int(leapYearHours)
	leapDay   = (31 + 28) * 24 // first slot of 29 February
	// maxSpans is how many stretches of missing hours are named.
	maxSpans = 5
)

// calendar puts hourly records into the slots of a leap year.
type calendar struct {
	records [leapSlots]Hour
	line    [leapSlots]int // where the record stood; 0 is missing
	leap    bool           // there is a record of 29 February
	some    bool
}

func slotOf(h *Hour) int {
	days := h.Day - 1
	for _, n := range leapMonthDays[:h.Month-1] {
		days += n
	}
	return days*24 + h.Hour - 1
}

// add puts the record of a line into its slot.
func (c *calendar) add(text string, line int) error {
	h, err := parseHour(text)
	if err != nil {
		return err
	}
	s := slotOf(&h)
	if c.line[s] != 0 {
		return fmt.Errorf("%s is already on line %d", slotName(s), c.line[s])
	}
	c.records[s], c.line[s], c.some = h, line, true
	c.leap = c.leap || (h.Month == 2 && h.Day == 29)
	return nil
}

// hours returns the year's records, or an error that names the missing ones.
func (c *calendar) hours() ([]Hour, error) {
	if !c.some {
		return nil, errors.New("there are no hourly records")
	}
	hours := make([]Hour, 0, leapSlots)
	var spans []string
	missing, start, last := 0, -1, -1
	end := func() {
		if start < 0 {
			return
		}
		if n := last - start + 1; n == 1 {
			spans = append(spans, slotName(start))
		} else {
			spans = append(spans, slotName(start)+" to "+slotName(last))
		}
		start = -1
	}
	for s := range leapSlots {
		if !c.leap && s >= leapDay && s < leapDay+24 {
			continue
		}
		if c.line[s] != 0 {
			end()
			hours = append(hours, c.records[s])
			continue
		}
		missing++
		if start < 0 {
			start = s
		}
		last = s
	}
	end()
	if missing == 0 {
		return hours, nil
	}
	if more := len(spans) - maxSpans; more > 0 {
		spans = append(spans[:maxSpans], fmt.Sprintf("%d more stretches", more))
	}
	return nil, fmt.Errorf("%d hours of %d: missing %s", len(hours), len(hours)+missing, strings.Join(spans, ", "))
}

// slotName is the month-day and hour of a slot, as in "02-14 hour 5".
func slotName(s int) string {
	day, month := s/24, 0
	for day >= leapMonthDays[month] {
		day -= leapMonthDays[month]
		month++
	}
	return fmt.Sprintf("%02d-%02d hour %d", month+1, day+1, s%24+1)
}
