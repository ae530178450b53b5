package pipeline

import (
	"io"
	"os"
	"path/filepath"
)

// staged is a file written whole beside its place, not yet in it.
type staged struct{ temporary, path string }

// stage writes a file beside its place.
func stage(path string, write func(io.Writer) error) (*staged, error) {
	f, err := os.CreateTemp(filepath.Dir(path), ".kelvinrow-*")
	if err != nil {
		return nil, err
	}
	s := &staged{f.Name(), path}
	err = write(f)
	if err == nil {
		err = f.Chmod(0o644) // CreateTemp keeps it to its owner
	}
	if e := f.Close(); err == nil {
		err = e
	}
	if err != nil {
		s.discard()
		return nil, err
	}
	return s, nil
}

// publish moves the file into its place.
func (s *staged) publish() error { return os.Rename(s.temporary, s.path) }

// discard removes the file unless it was published.
func (s *staged) discard() {
	if s != nil {
		_ = os.Remove(s.temporary) // gone when published
	}
}

// WriteWhole writes a file so that it is there whole or not at all.
func WriteWhole(path string, write func(io.Writer) error) error {
	s, err := stage(path, write)
	if err != nil {
		return err
	}
	defer s.discard()
	return s.publish()
}
