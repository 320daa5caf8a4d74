package serve

import (
	"crypto/tls"
	"crypto/x509"
	"errors"
	"fmt"
)

// newTLS makes the settings of TLS from a certificate chain, its private key and, where there is a third text, the authorities of callers' certificates,
// all in PEM. With authorities a connection without a certificate of theirs ends in the handshake.
func newTLS(contents [][]byte) (*tls.Config, error) {
	pair, err := tls.X509KeyPair(contents[0], contents[1])
	if err != nil {
		return nil, err
	}
	config := &tls.Config{
		MinVersion:   tls.VersionTLS12,
		Certificates: []tls.Certificate{pair},
		NextProtos:   []string{"h2", "http/1.1"},
	}
	if len(contents) > 2 {
		config.ClientCAs = x509.NewCertPool()
		if !config.ClientCAs.AppendCertsFromPEM(contents[2]) {
			return nil, errors.New("there is no certificate of an authority in the last file")
		}
		config.ClientAuth = tls.RequireAndVerifyClientCert
	}
	return config, nil
}

// listenTLS are settings that take those in force for each new connection.
func (s *Server) listenTLS() *tls.Config {
	return &tls.Config{
		MinVersion:         tls.VersionTLS12,
		GetConfigForClient: func(*tls.ClientHelloInfo) (*tls.Config, error) { return s.tls.Load(), nil },
	}
}

// subjectOf names a caller by its certificate: the common name, or the first name that the certificate is for.
func subjectOf(c *x509.Certificate) string {
	switch {
	case c.Subject.CommonName != "":
		return clip(c.Subject.CommonName)
	case len(c.DNSNames) > 0:
		return clip(c.DNSNames[0])
	case len(c.URIs) > 0:
		return clip(c.URIs[0].String())
	}
	return fmt.Sprintf("certificate %x", c.SerialNumber)
}
