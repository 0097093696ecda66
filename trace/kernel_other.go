//go:build !amd64

package trace

// kernel stands where this kind of processor has no fast tracer.
type kernel struct{}

func newKernel(*tracer) *kernel { return nil }

func (*kernel) follow([]ray, []Ledger, []sums) {}
