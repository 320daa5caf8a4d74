package stream

import "io"

// sendBytes is how much is written to Output at a time: so a slow client shows that it moves.
const sendBytes = 32 << 10

// sendAll is the sender: it writes to Output what the spool holds, and flushes when it holds no more.
func (r *run) sendAll() {
	defer close(r.delivered)
	if !r.wait() {
		return
	}
	held := false // something is written and not flushed
	for r.ctx.Err() == nil {
		p, err := r.spool.take()
		if p != nil {
			if !r.send(p) {
				return
			}
			held = true
			continue
		}
		if err != nil && err != io.EOF {
			r.abort(&BrokenError{Part: "sender", Err: err})
			return
		}
		if held && !r.flush() {
			return
		}
		held = false
		if err == io.EOF {
			r.whole.Store(true)
			return
		}
		select {
		case <-r.spool.filled:
		case <-r.ctx.Done():
		}
	}
}

// wait waits, where the output is to be held, until all of it is known or too much waits, and reports whether it is to be sent.
func (r *run) wait() bool {
	if r.Held == nil {
		return true
	}
	r.holding.Store(true)
	defer r.holding.Store(false)
	for r.ctx.Err() == nil {
		switch size, ended, over := r.spool.state(); {
		case over:
			if r.Held(nil, 0) {
				return true
			}
			r.abort(ErrDeclined)
			return false
		case ended:
			summary := r.summary // the writer is done with it
			if r.Held(&summary, size) {
				return true
			}
			r.whole.Store(true)
			return false
		}
		select {
		case <-r.spool.filled:
		case <-r.ctx.Done():
		}
	}
	return false
}

// send writes a page and recycles it.
func (r *run) send(p *page) bool {
	r.inside.write.Store(true)
	defer r.inside.write.Store(false)
	defer p.recycle()
	for data := p.data[:p.n]; len(data) > 0; {
		piece := data[:min(len(data), sendBytes)]
		n, err := r.Output.Write(piece)
		r.sent.Add(int64(n))
		if err == nil && n < len(piece) {
			err = io.ErrShortWrite
		}
		if err != nil {
			r.abort(&WriteError{err})
			return false
		}
		data = data[n:]
		r.Activity.Sent()
	}
	return true
}

func (r *run) flush() bool {
	if r.Flush == nil {
		return true
	}
	r.inside.write.Store(true)
	defer r.inside.write.Store(false)
	if err := r.Flush(); err != nil {
		r.abort(&WriteError{err})
		return false
	}
	return true
}
