package postgrestest

import (
	"bytes"
	"context"
	"fmt"
	"io"
	"net/url"
	"os"
	"os/exec"
	"os/user"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
	"syscall"
	"testing"
	"time"

	"github.com/jackc/pgx/v5"
)

// Options of a private server.
type Options struct {
	// Durable leaves the server's settings as Debian ships them, for measurements. Otherwise it does not wait for the disk: what a killed
	// server has written is still there after its restart, only a crash of the machine could lose it.
	Durable bool
	// Settings are further settings of the server: "name=value".
	Settings []string
}

// A Server is a private PostgreSQL server. Its user is "leat", who may do everything.
type Server struct {
	binaries string
	folder   string
	settings []string
	account  *syscall.Credential // whom the server runs as, nil for whoever runs the tests
	process  *exec.Cmd
	alive    io.WriteCloser // the server stops when this is closed, be it because the test process has died
}

// Start starts a server, which stops when the test ends. Where no binaries are found it skips the test, or fails it under LEAT_ALL_PARTS=1.
func Start(t testing.TB, options Options) *Server {
	t.Helper()
	s := start(t, options)
	t.Cleanup(func() {
		s.Stop(t)
		if err := os.RemoveAll(s.folder); err != nil {
			t.Error(err)
		}
	})
	return s
}

func start(t testing.TB, options Options) *Server {
	t.Helper()
	binaries, found := findBinaries()
	if !found {
		const missing = "no PostgreSQL for this test: neither " + Variable + " is set nor is there an initdb (Debian's package postgresql)"
		if os.Getenv("LEAT_ALL_PARTS") == "1" {
			t.Fatal(missing)
		}
		t.Skip(missing)
	}
	// A socket's path is short, so that t.TempDir, which holds the test's name, will not do.
	folder, err := os.MkdirTemp("", "leat-postgres-")
	if err != nil {
		t.Fatal(err)
	}
	s := &Server{binaries: binaries, folder: folder, settings: options.Settings}
	if !options.Durable {
		s.settings = append([]string{"fsync=off", "full_page_writes=off"}, s.settings...)
	}
	if os.Getuid() == 0 { // PostgreSQL refuses to run as root
		if s.account, err = unprivileged(); err != nil {
			t.Fatal(err)
		}
		if err := os.Chown(folder, int(s.account.Uid), int(s.account.Gid)); err != nil {
			t.Fatal(err)
		}
	}
	initialise := s.command(filepath.Join(binaries, "initdb"), "--pgdata", s.data(), "--username", "leat", "--auth", "trust",
		"--encoding", "UTF8", "--locale", "C.UTF-8", "--no-sync")
	if output, err := initialise.CombinedOutput(); err != nil {
		t.Fatalf("initdb: %v\n%s", err, output)
	}
	s.Run(t)
	return s
}

// findBinaries returns the folder of the newest server's programs.
func findBinaries() (folder string, found bool) {
	if path, err := exec.LookPath("initdb"); err == nil {
		return filepath.Dir(path), true
	}
	programs, err := filepath.Glob("/usr/lib/postgresql/*/bin/initdb")
	if err != nil || len(programs) == 0 {
		return "", false
	}
	version := func(program string) int {
		n, err := strconv.Atoi(filepath.Base(filepath.Dir(filepath.Dir(program))))
		if err != nil {
			return 0
		}
		return n
	}
	newest := slices.MaxFunc(programs, func(a, b string) int { return version(a) - version(b) })
	return filepath.Dir(newest), true
}

// unprivileged returns the account of the user postgres, or of nobody.
func unprivileged() (*syscall.Credential, error) {
	var last error
	for _, name := range []string{"postgres", "nobody"} {
		account, err := user.Lookup(name)
		if err != nil {
			last = err
			continue
		}
		uid, err := strconv.ParseUint(account.Uid, 10, 32)
		if err != nil {
			return nil, err
		}
		gid, err := strconv.ParseUint(account.Gid, 10, 32)
		if err != nil {
			return nil, err
		}
		return &syscall.Credential{Uid: uint32(uid), Gid: uint32(gid)}, nil
	}
	return nil, last
}

func (s *Server) data() string { return filepath.Join(s.folder, "data") }

func (s *Server) command(name string, arguments ...string) *exec.Cmd {
	command := exec.Command(name, arguments...)
	command.Dir = s.folder
	command.Env = []string{"LC_ALL=C.UTF-8", "PATH=" + s.binaries + ":/usr/bin:/bin", "TZ=UTC"}
	if s.account != nil {
		command.SysProcAttr = &syscall.SysProcAttr{Credential: s.account}
	}
	return command
}

// URL returns the address of the server's database "postgres".
func (s *Server) URL() string {
	return "postgres:///postgres?" + url.Values{"host": {s.folder}, "user": {"leat"}}.Encode()
}

// Process returns the number of the server's first process.
func (s *Server) Process(t testing.TB) int {
	t.Helper()
	content, err := os.ReadFile(filepath.Join(s.data(), "postmaster.pid"))
	if err != nil {
		t.Fatal(err)
	}
	line, _, _ := bytes.Cut(content, []byte("\n"))
	number, err := strconv.Atoi(string(line))
	if err != nil {
		t.Fatal(err)
	}
	return number
}

// Processors returns the processors' time that the server's processes have taken, as far as they have ended.
func (s *Server) Processors(t testing.TB) time.Duration {
	t.Helper()
	content, err := os.ReadFile(fmt.Sprintf("/proc/%d/stat", s.Process(t)))
	if err != nil {
		t.Fatal(err)
	}
	// Behind the name in parentheses: fields 3 and on; 16 and 17 are the times of children that were waited for, in hundredths of a second.
	_, rest, _ := strings.Cut(string(content), ") ")
	fields := strings.Fields(rest)
	if len(fields) < 15 {
		t.Fatalf("what the system says of the server is not understood: %s", content)
	}
	var sum time.Duration
	for _, field := range fields[13:15] {
		ticks, err := strconv.ParseInt(field, 10, 64)
		if err != nil {
			t.Fatal(err)
		}
		sum += time.Duration(ticks) * 10 * time.Millisecond
	}
	return sum
}

// Run starts the server again after Stop or Crash, and waits until it answers.
func (s *Server) Run(t testing.TB) {
	t.Helper()
	// The shell holds the other end of a pipe: when the test process dies, however it dies, the server stops, and its folder goes unless it is to run again.
	const keeper = `folder=$1; shift; "$@" >>"$folder/log" 2>&1 & server=$!; read -r word; kill -INT $server 2>/dev/null; wait $server; [ "$word" = keep ] || rm -rf "$folder"`
	arguments := []string{"-c", keeper, "keeper", s.folder, filepath.Join(s.binaries, "postgres"), "-D", s.data(),
		"-c", "listen_addresses=", "-c", "unix_socket_directories=" + s.folder}
	for _, setting := range s.settings {
		arguments = append(arguments, "-c", setting)
	}
	s.process = s.command("/bin/sh", arguments...)
	var err error
	if s.alive, err = s.process.StdinPipe(); err != nil {
		t.Fatal(err)
	}
	if err := s.process.Start(); err != nil {
		t.Fatal(err)
	}
	for deadline := time.Now().Add(time.Minute); ; time.Sleep(20 * time.Millisecond) {
		if err = s.ping(); err == nil {
			return
		}
		if time.Now().After(deadline) {
			log, _ := os.ReadFile(filepath.Join(s.folder, "log"))
			s.Stop(t)
			t.Fatalf("the server does not answer: %v\n%s", err, log)
		}
	}
}

func (s *Server) ping() error {
	ctx, cancel := context.WithTimeout(context.Background(), 5*time.Second)
	defer cancel()
	connection, err := pgx.Connect(ctx, s.URL())
	if err != nil {
		return err
	}
	defer connection.Close(ctx)
	return connection.Ping(ctx)
}

// Stop stops the server at once, breaking its connections off, and waits until it is gone.
func (s *Server) Stop(t testing.TB) {
	t.Helper()
	if s.process == nil {
		return
	}
	if _, err := io.WriteString(s.alive, "keep\n"); err != nil {
		t.Error(err)
	}
	// The keeper's exit code is that of the server, which may have been killed: it says nothing of interest.
	_ = s.process.Wait()
	s.process = nil
}

// Crash kills the server without a chance to tidy up, as the loss of its container would, and waits until it is gone.
func (s *Server) Crash(t testing.TB) {
	t.Helper()
	if err := syscall.Kill(s.Process(t), syscall.SIGQUIT); err != nil { // an immediate shutdown: no checkpoint, recovery at the next start
		t.Error(err)
	}
	s.Stop(t)
}

// String names the server in messages.
func (s *Server) String() string { return fmt.Sprintf("PostgreSQL of %s in %s", s.binaries, s.folder) }
