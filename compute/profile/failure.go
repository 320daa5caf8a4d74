package profile

// Unsolved is a search that did not converge. It is no answer and no physics: a fault of the solver.
type Unsolved struct{ What string }

func (u *Unsolved) Error() string { return "the search for " + u.What + " did not converge" }

func unsolved(what string) error { return &Unsolved{what} }

// noConveyance is the reason of a run with flow so shallow that its friction law gives no conveyance.
var noConveyance = &NoSolution{Code: "no_conveyance", Detail: "The flow is so shallow against its roughness that the friction law gives no conveyance; give a smaller sand roughness or a deeper boundary."}
