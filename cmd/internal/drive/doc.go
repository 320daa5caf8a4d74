// Package drive is the load generator for staging: it sends requests to a running service at fixed rates, whatever the service does with them (an open
// loop: a latency counts from the moment at which a request was due, so that a service that stalls cannot slow down those who measure it), and tells what became
// of them: accepted and right, refused as the contract says, wrong, broken. Probes and bulk streams run beside.
package drive
