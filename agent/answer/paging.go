package answer

import "strconv"

const (
	// UsualPage is how many entries an answer by pages has where no number is asked for, at most.
	UsualPage = 200
	// MostPage bounds them.
	MostPage = 1000
)

// limitOf reads how many entries a page may have; 0 where the text is empty.
func limitOf(text string) (n int, err error) {
	if text == "" {
		return 0, nil
	}
	if n, err = strconv.Atoi(text); err != nil || n < 1 || n > MostPage {
		return 0, Wrongf("limit %q: allowed are 1 to %d", text, MostPage)
	}
	return n, nil
}
