package climate

import (
	"fmt"
	"os"
	"path/filepath"
	"strings"
)

// Find returns the climate of a name, whatever its case. extra, the climates of
// the assumptions in force, come before the starter climates of the same name.
// An empty name is the first of extra, or else the first starter climate.
func Find(name string, extra []Climate) (*Climate, error) {
	starter, err := Starter()
	if err != nil {
		return nil, err
	}
	var names []string
	name = strings.TrimSpace(name)
	for _, list := range [][]Climate{extra, starter} {
		for i := range list {
			if name == "" || strings.EqualFold(list[i].Name, name) {
				c := list[i]
				return &c, nil
			}
			names = appendName(names, list[i].Name)
		}
	}
	return nil, fmt.Errorf("climate %q is unknown; there are %s, or give a weather file that ends in .epw",
		name, strings.Join(names, ", "))
}

func appendName(names []string, name string) []string {
	for _, n := range names {
		if strings.EqualFold(n, name) {
			return names
		}
	}
	return append(names, name)
}

// Load returns the climate of a weather file, where nameOrPath ends in .epw, or
// else the starter climate of that name.
func Load(nameOrPath string) (*Climate, error) {
	if !IsFile(nameOrPath) {
		return Find(nameOrPath, nil)
	}
	f, err := os.Open(nameOrPath)
	if err != nil {
		return nil, fmt.Errorf("weather file: %w", err)
	}
	defer f.Close()
	c, err := ReadEPW(f, "")
	if err != nil {
		return nil, fmt.Errorf("weather file %s: %w", filepath.Base(nameOrPath), err)
	}
	return c, nil
}

// IsFile tells a weather file's path from a climate's name.
func IsFile(nameOrPath string) bool {
	return strings.EqualFold(filepath.Ext(nameOrPath), ".epw")
}
