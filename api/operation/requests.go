package operation

import "sync"

// requests are requests of one type at rest, for operations that are asked for millions of times: decoded ones reach the heap. What an operation answers must
// hold nothing of the request's own memory, only copies of its values: texts, and its id, which is a part of the body.
type requests[T any] struct{ pool sync.Pool }

func (r *requests[T]) take() *T {
	if request, kept := r.pool.Get().(*T); kept {
		return request
	}
	return new(T)
}

// leave puts a request to rest and forgets what was in it, so that nothing of a body is kept alive or seen by the next.
func (r *requests[T]) leave(request *T) {
	var empty T
	*request = empty
	r.pool.Put(request)
}
