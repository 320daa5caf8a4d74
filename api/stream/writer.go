package stream

// A Writer frames answers. It appends to buffers and never writes by itself; the pump hashes, spools and sends what it
// appended. Its methods are called from one goroutine at a time, and after the Reader's first Next has returned, so
// that a header may depend on what the Reader found.
type Writer interface {
	// Begin appends what stands before the first answer. It is called once, just before the first Answer or End.
	Begin(dst []byte) []byte
	// Answer appends one answer as the Solver gave it, with what separates it from the one before. It may keep
	// answers back (a columnar format gathers rows) until Flush.
	Answer(dst, answer []byte) []byte
	// Flush appends what Answer kept back. It is called when nothing more is at hand and a client may be waiting, and before End.
	Flush(dst []byte) []byte
	// End appends what closes the output. The summary's hash covers all bytes before it.
	End(dst []byte, summary Summary) []byte
}

// A Reason says why a run ended before its body did.
type Reason string

const (
	Draining  Reason = "draining"   // the process is shutting down
	SpoolFull Reason = "spool_full" // too many answers that the client has not taken
	Idle      Reason = "idle"       // the client neither sent nor was owed anything for too long
)

// A Summary is the account of a run.
type Summary struct {
	// Complete reports whether every record of the body was answered.
	Complete bool
	// Reason and ResumeAt are set where Complete is false: every record before line ResumeAt is answered, none from there on.
	Reason   Reason
	ResumeAt int64
	// Lines counts the records answered, Problems those of them that were answered with a problem.
	Lines    int64
	Problems int64
	// SHA256 is the hash of all bytes before those of Writer.End.
	SHA256 [32]byte
	// Whole is the hash of all bytes, those of Writer.End included; zero while End is being written.
	Whole [32]byte
}
