package serve

import (
	"crypto/ecdsa"
	"crypto/elliptic"
	"crypto/rand"
	"crypto/tls"
	"crypto/x509"
	"crypto/x509/pkix"
	"encoding/pem"
	"io"
	"math/big"
	"net"
	"net/http"
	"path/filepath"
	"strings"
	"testing"
	"time"
)

// An authority signs certificates for a test.
type authority struct {
	t           *testing.T
	certificate *x509.Certificate
	key         *ecdsa.PrivateKey
	serial      int64
}

func newAuthority(t *testing.T, name string) *authority {
	a := &authority{t: t}
	a.certificate, a.key = a.issue(&x509.Certificate{
		Subject: pkix.Name{CommonName: name}, IsCA: true, BasicConstraintsValid: true, KeyUsage: x509.KeyUsageCertSign,
	})
	return a
}

// issue signs a certificate; an authority without one signs its own.
func (a *authority) issue(template *x509.Certificate) (*x509.Certificate, *ecdsa.PrivateKey) {
	a.t.Helper()
	key, err := ecdsa.GenerateKey(elliptic.P256(), rand.Reader)
	if err != nil {
		a.t.Fatal(err)
	}
	a.serial++
	template.SerialNumber = big.NewInt(a.serial)
	template.NotBefore, template.NotAfter = time.Now().Add(-time.Hour), time.Now().Add(time.Hour)
	parent, signer := a.certificate, a.key
	if parent == nil {
		parent, signer = template, key
	}
	der, err := x509.CreateCertificate(rand.Reader, template, parent, &key.PublicKey, signer)
	if err != nil {
		a.t.Fatal(err)
	}
	certificate, err := x509.ParseCertificate(der)
	if err != nil {
		a.t.Fatal(err)
	}
	return certificate, key
}

// pair issues a certificate of a name, for servers on this machine and for callers alike, as PEM.
func (a *authority) pair(name string) (certificate, key string) {
	a.t.Helper()
	c, k := a.issue(&x509.Certificate{
		Subject: pkix.Name{CommonName: name}, DNSNames: []string{"localhost"}, IPAddresses: []net.IP{net.IPv4(127, 0, 0, 1)},
		ExtKeyUsage: []x509.ExtKeyUsage{x509.ExtKeyUsageServerAuth, x509.ExtKeyUsageClientAuth},
	})
	der, err := x509.MarshalPKCS8PrivateKey(k)
	if err != nil {
		a.t.Fatal(err)
	}
	return pemOf("CERTIFICATE", c.Raw), pemOf("PRIVATE KEY", der)
}

func pemOf(kind string, der []byte) string {
	return string(pem.EncodeToMemory(&pem.Block{Type: kind, Bytes: der}))
}

// secureClient is a client that trusts the authority and shows a certificate, if it has one.
func (a *authority) secureClient(http2 bool, certificate, key string) *http.Client {
	a.t.Helper()
	pool := x509.NewCertPool()
	pool.AddCert(a.certificate)
	config := &tls.Config{RootCAs: pool}
	if certificate != "" {
		pair, err := tls.X509KeyPair([]byte(certificate), []byte(key))
		if err != nil {
			a.t.Fatal(err)
		}
		config.Certificates = []tls.Certificate{pair}
	}
	var protocols http.Protocols
	protocols.SetHTTP1(!http2)
	protocols.SetHTTP2(http2)
	transport := &http.Transport{TLSClientConfig: config, Protocols: &protocols, DisableCompression: true}
	a.t.Cleanup(transport.CloseIdleConnections)
	return &http.Client{Transport: transport, Timeout: 30 * time.Second}
}

func ask(t *testing.T, client *http.Client, method, url, body string) (*http.Response, error) {
	t.Helper()
	request, err := http.NewRequest(method, url, strings.NewReader(body))
	if err != nil {
		t.Fatal(err)
	}
	request.Header.Set("Content-Type", "application/x-ndjson")
	response, err := client.Do(request)
	if err == nil {
		text, readErr := io.ReadAll(response.Body)
		if readErr != nil {
			t.Error(readErr)
		}
		response.Body.Close()
		response.Body = io.NopCloser(strings.NewReader(string(text)))
	}
	return response, err
}

// startTLS starts a server whose certificate the authority signed; callers are those whom another one vouches for, if there is one.
func startTLS(t *testing.T, a, callers *authority) (r *running, folder string) {
	t.Helper()
	folder = t.TempDir()
	certificate, key := a.pair("leat")
	r = start(t, func(c *Config, _ *Surroundings) {
		c.TLSCertificate = writeFile(t, filepath.Join(folder, "certificate"), certificate)
		c.TLSKey = writeFile(t, filepath.Join(folder, "key"), key)
		if callers != nil {
			c.ClientAuthorities = writeFile(t, filepath.Join(folder, "authorities"), pemOf("CERTIFICATE", callers.certificate.Raw))
		}
	})
	return r, folder
}

func TestTLSSpeaksBothProtocols(t *testing.T) {
	a := newAuthority(t, "ours")
	r, _ := startTLS(t, a, nil)
	for _, http2 := range []bool{false, true} {
		client := a.secureClient(http2, "", "")
		response, err := ask(t, client, "POST", "https://"+r.address+"/v1/bulk/depths", strings.Repeat("{}\n", 1000))
		if err != nil {
			t.Fatal(err)
		}
		text, _ := io.ReadAll(response.Body)
		if response.StatusCode != 200 || !strings.Contains(string(text), `{"end":true,"lines":1000`) || (response.ProtoMajor == 2) != http2 || response.TLS.Version < tls.VersionTLS12 {
			t.Errorf("HTTP/2 %v: %s %s", http2, response.Proto, response.Status)
		}
	}
	// What is no TLS is told so by net/http and closed; an old version ends in its handshake.
	response, err := http.Get("http://" + r.address + "/livez")
	if err == nil {
		response.Body.Close()
		if response.StatusCode != 400 {
			t.Errorf("in the clear: %s", response.Status)
		}
	}
	old := a.secureClient(false, "", "")
	old.Transport.(*http.Transport).TLSClientConfig.MaxVersion = tls.VersionTLS11
	if _, err := ask(t, old, "GET", "https://"+r.address+"/livez", ""); err == nil {
		t.Error("TLS 1.1 was spoken")
	}
}

func TestMutualTLS(t *testing.T) {
	ours, callers, strangers := newAuthority(t, "ours"), newAuthority(t, "callers"), newAuthority(t, "strangers")
	r, _ := startTLS(t, ours, callers)
	url := "https://" + r.address + "/version"
	certificate, key := callers.pair("survey")
	for _, http2 := range []bool{false, true} {
		response, err := ask(t, ours.secureClient(http2, certificate, key), "GET", url, "")
		if err != nil || response.StatusCode != 200 {
			t.Fatalf("with a certificate: %v, %v", response, err)
		}
		if line := r.log.access(t, response.Header.Get("Request-Id")); line["caller"] != "survey" {
			t.Errorf("logged caller %v", line["caller"])
		}
	}
	if _, err := ask(t, ours.secureClient(false, "", ""), "GET", url, ""); err == nil {
		t.Error("let in without a certificate")
	}
	certificate, key = strangers.pair("survey")
	if _, err := ask(t, ours.secureClient(false, certificate, key), "GET", url, ""); err == nil {
		t.Error("let in with a stranger's certificate")
	}
}

func TestCertificatesAreTakenOverWhileTheServiceRuns(t *testing.T) {
	ours, callers, others := newAuthority(t, "ours"), newAuthority(t, "callers"), newAuthority(t, "others")
	r, folder := startTLS(t, ours, callers)
	certificate, key := callers.pair("survey")
	serial := func() string {
		response, err := ask(t, ours.secureClient(false, certificate, key), "GET", "https://"+r.address+"/version", "")
		if err != nil {
			return err.Error()
		}
		return response.TLS.PeerCertificates[0].SerialNumber.String()
	}
	first := serial()
	newCertificate, newKey := ours.pair("leat")
	writeFile(t, filepath.Join(folder, "certificate"), newCertificate)
	r.Renew() // the key is still the old one
	if got := serial(); got != first {
		t.Errorf("half a pair: %s, want %s", got, first)
	}
	writeFile(t, filepath.Join(folder, "key"), newKey)
	r.Renew()
	if got := serial(); got == first || len(got) > 3 {
		t.Errorf("the new pair: %s", got)
	}
	writeFile(t, filepath.Join(folder, "authorities"), pemOf("CERTIFICATE", others.certificate.Raw))
	r.Renew()
	if got := serial(); !strings.Contains(got, "tls") {
		t.Errorf("a caller whose authority is gone: %s", got)
	}
}

func TestUnusableCertificatesStopTheStart(t *testing.T) {
	a := newAuthority(t, "ours")
	folder := t.TempDir()
	certificate, key := a.pair("leat")
	_, otherKey := a.pair("leat")
	good, goodKey := writeFile(t, filepath.Join(folder, "c"), certificate), writeFile(t, filepath.Join(folder, "k"), key)
	for _, files := range [][3]string{
		{good, writeFile(t, filepath.Join(folder, "other"), otherKey), ""}, {good, good, ""}, {good, folder + "/absent", ""}, {good, goodKey, goodKey},
	} {
		config := testConfig(t)
		config.TLSCertificate, config.TLSKey, config.ClientAuthorities = files[0], files[1], files[2]
		if _, err := New(config, nil, testSurroundings(new(logBuffer))); err == nil || !strings.Contains(err.Error(), "certificates from") {
			t.Errorf("%q: %v", files, err)
		}
	}
}
