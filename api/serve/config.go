package serve

import (
	"os"
	"runtime"
	"time"

	"leat/api/wire"
)

// Config is everything an operator may set. The zero value is not useful: start from Default.
type Config struct {
	Listen string // TCP address, host:port; port 0 picks a free one

	BodyBytes    int64         // greatest request body of a unary operation
	ProfileBytes int64         // the same of a profile
	LineBytes    int64         // greatest record of a bulk request, without its line end
	HeldBytes    int64         // request bodies held in memory at once, over all unary requests
	ArrayItems   int           // greatest length of a list in a request that has no limit of its own
	Points       int           // greatest number of points of a surveyed section
	Reaches      int           // of a profile
	Stations     int           // of a profile
	ReportPoints int           // places at which a profile reports
	Flows        int           // named flows of an appraisal
	Work         int           // greatest estimated work of one request
	TimeLimit    time.Duration // longest time of one calculation

	Solves    int           // how many solve at once; 0 is one for each processor
	Queue     int           // unary requests of long operations, and of short ones, that may wait for their turn
	QueueWait time.Duration // longest time that they may wait
	Streams   int           // bulk streams open at once
	Rate      float64       // requests a second from each caller; 0 is no bound
	Burst     int           // how many of them may come at once

	IdleLimit   time.Duration // a bulk stream without progress in either direction is cut after this
	SpoolDir    string        // folder for answers that a bulk client does not take yet
	MemoryBytes int64         // answers that wait in memory, for each bulk stream, before they go to its file
	SpoolBytes  int64         // answers that wait in the file of one bulk stream
	SpoolTotal  int64         // answers that wait in the files of all bulk streams together

	DrainDelay time.Duration // from being unready until the listener closes
	DrainLimit time.Duration // from a stop signal until what still runs is cut

	AdminListen       string // TCP address for metrics, process profiles and probes; empty for none
	Connections       int    // most connections at once on Listen
	KeysFile          string // whose keys are asked for; empty for nobody's
	TLSCertificate    string // file of the certificate chain in PEM; empty for no TLS
	TLSKey            string // file of its private key in PEM
	ClientAuthorities string // file of the authorities in PEM of which callers must show a certificate; empty for none
	AllowOrigin       string // web origins whose pages may read answers, commas between
	AllowOpen         bool   // listen beyond loopback without keys and TLS
}

// Default returns the settings of a server that was told nothing.
func Default() Config {
	limits := wire.DefaultLimits()
	return Config{
		Listen:       "127.0.0.1:8080",
		BodyBytes:    1 << 20,
		ProfileBytes: 16 << 20,
		LineBytes:    1 << 20,
		HeldBytes:    32 << 20,
		ArrayItems:   limits.ArrayItems,
		Points:       limits.Points,
		Reaches:      limits.Reaches,
		Stations:     limits.Stations,
		ReportPoints: limits.ReportPoints,
		Flows:        limits.Flows,
		Work:         limits.Work,
		TimeLimit:    10 * time.Second,
		Queue:        256,
		QueueWait:    time.Second,
		Streams:      64,
		Burst:        100,
		IdleLimit:    30 * time.Second,
		SpoolDir:     os.TempDir(),
		MemoryBytes:  4 << 20,
		SpoolBytes:   4 << 30,
		SpoolTotal:   16 << 30,
		DrainDelay:   0,
		DrainLimit:   25 * time.Second,
		Connections:  4096,
	}
}

// solves is how many solve at once.
func (c *Config) solves() int {
	if c.Solves == 0 {
		return runtime.GOMAXPROCS(0)
	}
	return c.Solves
}
