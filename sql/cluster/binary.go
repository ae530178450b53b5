package cluster

import (
	"errors"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"runtime"
	"strconv"
	"strings"
)

// oldest is the oldest major version of Postgres that will do.
const oldest = 14

// errMissing is the one line for a machine without Postgres.
var errMissing = errors.New("Postgres 14 or newer was not found: install it with: " + installCommand() + ", or give a server with --db URL")

func installCommand() string {
	if runtime.GOOS == "darwin" {
		return "brew install postgresql"
	}
	return "apt-get install postgresql"
}

// binVariable names the one folder to look in, instead of the usual ones.
const binVariable = "KELVINROW_POSTGRES_BIN"

// binaries finds the folder with initdb and postgres: of the given major
// version where the cluster exists, else the newest.
func binaries(major string) (string, error) {
	best, bestMajor := "", 0
	seen := map[string]bool{}
	for _, d := range candidates() {
		real, err := filepath.EvalSymlinks(filepath.Join(d, "postgres"))
		if err != nil || seen[real] {
			continue
		}
		seen[real] = true
		if _, err := os.Stat(filepath.Join(d, "initdb")); err != nil {
			continue // a package with the server alone cannot make a cluster
		}
		v := majorOf(real)
		if major != "" && strconv.Itoa(v) == major {
			return d, nil
		}
		if v >= oldest && v > bestMajor {
			best, bestMajor = d, v
		}
	}
	switch {
	case best == "":
		return "", errMissing
	case major != "":
		return "", fmt.Errorf("the private store was made by Postgres %s, but only Postgres %d is installed: install Postgres %s beside it, or start a new store elsewhere with KELVINROW_STORE=DIR", major, bestMajor, major)
	}
	return best, nil
}

func candidates() (dirs []string) {
	if d := os.Getenv(binVariable); d != "" {
		return []string{d}
	}
	if p, err := exec.LookPath("postgres"); err == nil {
		dirs = append(dirs, filepath.Dir(p))
	}
	for _, pattern := range []string{
		"/usr/lib/postgresql/*/bin",         // Debian, Ubuntu
		"/usr/pgsql-*/bin",                  // the project's own packages for Red Hat
		"/usr/local/pgsql/bin",              // built from source
		"/opt/homebrew/opt/postgresql*/bin", // Homebrew
		"/usr/local/opt/postgresql*/bin",
		"/Applications/Postgres.app/Contents/Versions/*/bin",
	} {
		found, _ := filepath.Glob(pattern) // the patterns are well formed
		dirs = append(dirs, found...)
	}
	return dirs
}

// majorOf asks a postgres binary for its major version; 0 when it does not say.
func majorOf(postgres string) int {
	out, err := exec.Command(postgres, "--version").Output()
	if err != nil {
		return 0
	}
	return parseMajor(string(out))
}

// parseMajor reads "postgres (PostgreSQL) 15.18 (Debian 15.18-0+deb12u1)".
func parseMajor(version string) int {
	_, number, _ := strings.Cut(version, "(PostgreSQL) ")
	if i := strings.IndexFunc(number, func(r rune) bool { return r < '0' || r > '9' }); i >= 0 {
		number = number[:i] // also of 18beta1
	}
	v, err := strconv.Atoi(number)
	if err != nil {
		return 0
	}
	return v
}
