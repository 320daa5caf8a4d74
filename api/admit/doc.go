// Package admit decides who may work, and when. It knows neither HTTP nor hydraulics.
//
// A Pool has as many slots as there are processors to solve with. Work is of some classes, and the classes that want slots get equal
// shares of them, however much each asks for: whoever is behind in time held goes first, and a long solve gives way at its checkpoints.
// Requests wait in a short line or are refused at once; bulk streams, whose clients are held up by the pump instead, wait as long as it takes.
//
// Rates bound how often each caller may come, and Places how many streams are open.
package admit
