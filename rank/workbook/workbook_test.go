package workbook

import (
	"bytes"
	"os"
	"testing"
)

func TestSameInputSameBytes(t *testing.T) {
	t.Parallel()
	in := portfolio(t, 60)
	first := written(t, in)
	if p := os.Getenv("KEEP"); p != "" {
		os.WriteFile(p, first, 0o644)
	}
	for range 3 {
		if !bytes.Equal(first, written(t, in)) {
			t.Fatal("the same input gave different bytes")
		}
	}
}
