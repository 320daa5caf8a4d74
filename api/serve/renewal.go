package serve

import (
	"crypto/sha256"
	"errors"
	"fmt"
	"log/slog"
	"os"
	"time"
)

// A renewal keeps in step with files that change while the service runs: keys and certificates.
type renewal struct {
	what  string
	paths []string
	// apply takes the files' contents, in the order of the paths. On an error all stays as it was.
	apply func(contents [][]byte) error
	seen  [sha256.Size]byte // of the contents, or of the error, that were dealt with last
}

// renewalPause is how often the files are looked at. A signal does it at once.
const renewalPause = 2 * time.Second

// mostRenewed bounds what is read of one file, so that a wrong path cannot fill the memory.
const mostRenewed = 4 << 20

// look reads the files, and applies them if anything about them is new.
func (r *renewal) look() (changed bool, err error) {
	sum := sha256.New()
	var contents [][]byte
	for _, path := range r.paths {
		text, err := readSmall(path)
		if err != nil {
			hash := sha256.Sum256([]byte(err.Error()))
			changed = hash != r.seen
			r.seen = hash
			return changed, err
		}
		fmt.Fprintf(sum, "%d ", len(text))
		sum.Write(text)
		contents = append(contents, text)
	}
	hash := [sha256.Size]byte(sum.Sum(nil))
	if hash == r.seen {
		return false, nil
	}
	r.seen = hash
	return true, r.apply(contents)
}

var errTooBig = errors.New("the file is larger than 4 MiB")

func readSmall(path string) ([]byte, error) {
	info, err := os.Stat(path)
	switch {
	case err != nil:
		return nil, err
	case info.IsDir():
		return nil, fmt.Errorf("%s is a folder", path)
	case info.Size() > mostRenewed:
		return nil, errTooBig
	}
	return os.ReadFile(path)
}

// Renew looks at the files of keys and certificates now. What has changed and is sound holds from then on; what is not sound is logged, once, and
// what held before goes on holding.
func (s *Server) Renew() {
	s.renewing.Lock()
	defer s.renewing.Unlock()
	for _, r := range s.renewals {
		switch changed, err := r.look(); {
		case !changed:
		case err != nil:
			s.log.Error("changed "+r.what+" cannot be used, so those from before still hold", slog.String("error", err.Error()))
		default:
			s.log.Info("changed " + r.what + " taken over")
		}
	}
}

// keepRenewing calls Renew again and again until done is closed.
func (s *Server) keepRenewing(done <-chan struct{}) {
	ticker := time.NewTicker(renewalPause)
	defer ticker.Stop()
	for {
		select {
		case <-done:
			return
		case <-ticker.C:
			s.Renew()
		}
	}
}

// firstLook loads everything that is renewed later; a fault stops the start.
func (s *Server) firstLook() error {
	if s.config.KeysFile != "" {
		s.renewals = append(s.renewals, &renewal{what: "keys", paths: []string{s.config.KeysFile}, apply: func(contents [][]byte) error {
			ring, err := parseKeys(contents[0])
			if err == nil {
				s.keys.Store(ring)
			}
			return err
		}})
	}
	if s.config.TLSCertificate != "" {
		paths := []string{s.config.TLSCertificate, s.config.TLSKey}
		if s.config.ClientAuthorities != "" {
			paths = append(paths, s.config.ClientAuthorities)
		}
		s.renewals = append(s.renewals, &renewal{what: "certificates", paths: paths, apply: func(contents [][]byte) error {
			config, err := newTLS(contents)
			if err == nil {
				s.tls.Store(config)
			}
			return err
		}})
	}
	var mistakes []error
	for _, r := range s.renewals {
		if _, err := r.look(); err != nil {
			mistakes = append(mistakes, fmt.Errorf("%s from %q cannot be used: %w", r.what, r.paths, err))
		}
	}
	return errors.Join(mistakes...)
}
