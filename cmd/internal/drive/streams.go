package drive

import (
	"bufio"
	"bytes"
	"context"
	"crypto/sha256"
	"encoding/hex"
	"errors"
	"fmt"
	"io"
	"net/http"
	"sync"
	"time"

	"github.com/go-json-experiment/json"
)

// A flow is what became of the bulk streams.
type flow struct {
	mutex sync.Mutex
	whole int64 // ended right
	wrong int64
	lines int64
	said  []string
}

// stream keeps streams open until the context ends, and then waits for those that are open to end.
func (d *drive) stream(ctx context.Context, s *Stream, f *flow) {
	transport := &http.Transport{Proxy: nil}
	defer transport.CloseIdleConnections()
	caller := &http.Client{Transport: transport}
	var all sync.WaitGroup
	for range s.AtOnce {
		all.Go(func() {
			for ctx.Err() == nil {
				lines, err := d.streamOnce(ctx, caller, s)
				f.mutex.Lock()
				f.lines += int64(lines)
				if err == nil {
					f.whole++
				} else {
					f.wrong++
					if len(f.said) < 5 {
						f.said = append(f.said, err.Error())
					}
				}
				f.mutex.Unlock()
			}
		})
	}
	all.Wait()
}

// streamOnce sends lines at their pace, fewer where the context ends, and checks that there is the same answer to each and an end line that is right.
func (d *drive) streamOnce(ctx context.Context, caller *http.Client, s *Stream) (lines int, err error) {
	body, feed := io.Pipe()
	record := append(bytes.ReplaceAll(s.Record, []byte("\n"), nil), '\n')
	sent := make(chan int, 1)
	go func() {
		n := 0
		defer func() { sent <- n }()
		defer feed.Close()
		start := time.Now()
		for n < s.Lines && ctx.Err() == nil {
			due := min(s.Lines, 1+int(time.Since(start).Seconds()*s.LinesPerSecond))
			if due > n {
				if _, err := feed.Write(bytes.Repeat(record, due-n)); err != nil {
					return
				}
				n = due
			}
			time.Sleep(5 * time.Millisecond)
		}
	}()
	defer body.Close()
	request, err := http.NewRequest(http.MethodPost, "http://"+d.address+s.Path, body)
	if err != nil {
		return 0, err
	}
	request.Header.Set("Content-Type", "application/x-ndjson")
	response, err := caller.Do(request)
	if err != nil {
		return 0, err
	}
	defer response.Body.Close()
	if response.StatusCode != http.StatusOK {
		text, _ := io.ReadAll(io.LimitReader(response.Body, 300))
		return 0, fmt.Errorf("stream: status %d: %s", response.StatusCode, text)
	}
	return readStream(response.Body, sent)
}

// readStream reads answers to their end line.
func readStream(body io.Reader, sent <-chan int) (lines int, err error) {
	in := bufio.NewReaderSize(body, 64<<10)
	hash := sha256.New()
	var first, line []byte
	for {
		line, err = in.ReadBytes('\n')
		if err != nil {
			return lines, fmt.Errorf("stream broken off after %d lines: %w", lines, err)
		}
		if bytes.HasPrefix(line, []byte(`{"end":`)) {
			break
		}
		hash.Write(line)
		lines++
		_, result, found := bytes.Cut(line, []byte(`,"result":`))
		if !found {
			_, result, found = bytes.Cut(line, []byte(`"result":`))
		}
		if first == nil {
			first = bytes.Clone(result)
		}
		if !found || !bytes.Equal(result, first) {
			return lines, fmt.Errorf("stream: line %d is not answered like the first: %.200s", lines, line)
		}
	}
	var end struct {
		End    bool   `json:"end"`
		Lines  int    `json:"lines"`
		SHA256 string `json:"sha256"`
	}
	if err := json.Unmarshal(line, &end); err != nil {
		return lines, err
	}
	if n := <-sent; !end.End || end.Lines != lines || n != lines || end.SHA256 != hex.EncodeToString(hash.Sum(nil)) {
		return lines, fmt.Errorf("stream: %d lines sent, %d answered, and the end line says %s", n, lines, line)
	}
	if _, err := in.ReadByte(); !errors.Is(err, io.EOF) {
		return lines, errors.New("stream: something comes after the end line")
	}
	return lines, nil
}
