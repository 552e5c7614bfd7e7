// Package needs is for tests that need what a machine may lack.
package needs

import (
	"os"
	"testing"
)

// Missing skips the test for what is missing; where continuous integration runs
// nothing may be, and the test fails.
func Missing(t testing.TB, format string, args ...any) {
	t.Helper()
	if os.Getenv("CI") == "true" {
		t.Fatalf(format, args...)
	}
	t.Skipf(format, args...)
}
