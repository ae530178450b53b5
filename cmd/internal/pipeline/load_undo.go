package pipeline

import (
	"context"
	"path/filepath"

	"kelvinrow/sql/store"
)

// Undo takes a loaded file back: the one of the content that file has now, or
// else the one loaded from there, or else the one of that name. The file need
// not be there any more.
func (s *Session) Undo(ctx context.Context, file string) (store.Undone, error) {
	var sum []byte
	if h, _, err := contentHash(file); err == nil {
		sum = h[:]
	}
	path, err := filepath.Abs(file)
	if err != nil {
		return store.Undone{}, err
	}
	return s.Store.Undo(ctx, s.Portfolio, filepath.ToSlash(filepath.Clean(file)), path, sum)
}
