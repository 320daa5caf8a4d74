package profile

// Unsolved is a search that did not converge. It is no answer and no physics: a fault of the solver.
type Unsolved struct{ What string }

func (u *Unsolved) Error() string { return "the search for " + u.What + " did not converge" }

func unsolved(what string) error { return &Unsolved{what} }
