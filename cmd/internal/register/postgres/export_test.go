package postgres

// SetAttempts sets how often a batch is tried, and returns what sets it back.
func SetAttempts(n int) (back func()) {
	old := attempts
	attempts = n
	return func() { attempts = old }
}
