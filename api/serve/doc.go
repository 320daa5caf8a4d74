// Package serve is the edge of Leat: routes, middleware, problems over HTTP, metrics, settings and the life of the server.
// It computes nothing; operations are handed in. It is the only importer of gin.
package serve
