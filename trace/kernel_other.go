//go:build !amd64

package trace

// kernel stands where this kind of processor has no fast tracer.
type kernel struct{}

func hasVectors() bool { return false }

func newKernel(*tracer) *kernel { return nil }

func (*kernel) cutAt(float64, int) {}

func (*kernel) follow([]ray, []Ledger, []float64, []sums) {}
