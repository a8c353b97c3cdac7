package transform

import "sync"

// pool keeps buffers that are not in use. They are all of one length.
type pool[T any] struct{ buffers sync.Pool }

// get returns a buffer of length n; what is in it is left over from earlier use.
func (p *pool[T]) get(n int) *[]T {
	if b, ok := p.buffers.Get().(*[]T); ok {
		return b
	}
	b := make([]T, n)
	return &b
}

func (p *pool[T]) put(b *[]T) { p.buffers.Put(b) }
