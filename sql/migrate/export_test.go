package migrate

import (
	"context"
	"io/fs"

	"github.com/jackc/pgx/v5"
)

// The database tests need dbtest, which needs this package, so they are outside.

// Count is the number of migrations of this program.
func Count() int {
	steps, err := read(files)
	if err != nil {
		panic(err) // the tests' own files
	}
	return len(steps)
}

// UpWith migrates as a program would that had one more migration.
func UpWith(ctx context.Context, conn *pgx.Conn, name, text string) error {
	steps, err := read(files)
	if err != nil {
		return err
	}
	return up(ctx, conn, append(steps, step{len(steps) + 1, name, text, "sum of " + text}))
}

// Checksums returns the checksums of migrations in a folder.
func Checksums(fsys fs.FS) (sums []string, err error) {
	steps, err := read(fsys)
	for _, s := range steps {
		sums = append(sums, s.checksum)
	}
	return sums, err
}
