package budget

import "testing"

// noted takes the place of a test and remembers whether it failed.
type noted struct {
	testing.TB
	failed bool
}

func (n *noted) Helper()               {}
func (n *noted) Errorf(string, ...any) { n.failed = true }

var kept []byte // so that the memory is really set aside

func TestHold(t *testing.T) {
	for _, row := range []struct {
		name         string
		takes, most  int
		wantsFailure bool
	}{
		{"within", 8 << 20, 10 << 20, false},
		{"beyond", 64 << 20, 10 << 20, true},
		{"nothing", 0, 0, false},
	} {
		n := &noted{TB: t}
		Hold(n, row.most, func() { kept = make([]byte, row.takes) })
		if n.failed != row.wantsFailure {
			t.Errorf("%s: failed is %v", row.name, n.failed)
		}
	}
}
