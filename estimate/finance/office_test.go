package finance

import (
	"encoding/csv"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"strconv"
	"strings"
	"testing"
)

// LibreOffice's PV, PMT, NPV and NPER, which nobody here wrote, against ours. The
// cases travel as a table of formulas and come back as a table of numbers with
// fifteen digits: hence 1e-12.
func TestAgainstLibreOffice(t *testing.T) {
	t.Parallel()
	if _, err := exec.LookPath("soffice"); err != nil || os.Getenv("KELVINROW_WITHOUT_OFFICE") == "1" {
		t.Skip("LibreOffice (soffice) is not installed, or KELVINROW_WITHOUT_OFFICE=1 is set")
	}
	var formulas []string
	var ours []float64
	add := func(v float64, format string, args ...any) {
		formulas = append(formulas, "="+fmt.Sprintf(format, args...))
		ours = append(ours, v)
	}
	for _, rate := range []float64{0, 0.005, 0.03, 0.08} {
		for _, years := range []int{1, 7, 20, 40} {
			add(PresentValueFactor(rate, 0, float64(years)), "PV(%g;%d;-1)", rate, years)
			add(CapitalRecovery(rate, float64(years)), "PMT(%g;%d;-1)", rate, years)
			for _, rise := range []float64{0.02, 0.03} {
				flows := make([]string, years)
				for y := range flows {
					flows[y] = fmt.Sprintf("900*(1+%g)^%d-80", rise, y+1)
				}
				if years <= 20 { // NPV takes thirty arguments
					add(NetPresentValue(10_000, 900, 80, rate, rise, float64(years)), "-10000+NPV(%g;%s)", rate, strings.Join(flows, ";"))
				}
			}
		}
		add(DiscountedPayback(10_000, 1100, rate), "NPER(%g;1100;-10000)", rate)
	}
	got := calculate(t, formulas)
	for i, v := range got {
		near(t, formulas[i]+" over ours", v/ours[i], 1, 1e-12)
	}
}

// calculate has LibreOffice work out formulas, in a profile of its own.
func calculate(t *testing.T, formulas []string) []float64 {
	t.Helper()
	dir := t.TempDir()
	in := filepath.Join(dir, "formulas.csv")
	text := ""
	for _, f := range formulas {
		text += `"` + f + "\"\n"
	}
	if err := os.WriteFile(in, []byte(text), 0o600); err != nil {
		t.Fatal(err)
	}
	// Comma, quote, UTF-8, from line 1; numbers in full, not as shown.
	cmd := exec.CommandContext(t.Context(), "soffice", "-env:UserInstallation=file://"+filepath.Join(dir, "profile"),
		"--headless", "--norestore", "--convert-to", "csv:Text - txt - csv (StarCalc):44,34,76,1,,0,false,false,false",
		"--outdir", filepath.Join(dir, "out"), in)
	cmd.Env = append(os.Environ(), "HOME="+dir)
	if msg, err := cmd.CombinedOutput(); err != nil {
		t.Fatalf("soffice: %v\n%s", err, msg)
	}
	out, err := os.Open(filepath.Join(dir, "out", "formulas.csv"))
	if err != nil {
		t.Fatal(err)
	}
	defer out.Close()
	r := csv.NewReader(out)
	r.FieldsPerRecord = -1
	rows, err := r.ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	if len(rows) != len(formulas) {
		t.Fatalf("%d results of %d formulas", len(rows), len(formulas))
	}
	values := make([]float64, len(rows))
	for i, row := range rows {
		if values[i], err = strconv.ParseFloat(row[0], 64); err != nil {
			t.Fatalf("%s: %v", formulas[i], err)
		}
	}
	return values
}
