// Package access asks those who come over the network who they are: by a password (HTTP Basic,
// RFC 7617, kept as a bcrypt hash), by the certificate of an authority that the plant names (TLS),
// or by both.
//
// The file that says so has the format in which exporters for Prometheus are configured
// (https://prometheus.io/docs/prometheus/latest/configuration/https/). Of its keys these are
// known; any other is refused, so that nobody relies on what is not done:
//
//	tls_server_config:
//	  cert_file, key_file   certificate of the agent and its key, PEM
//	  min_version           TLS12 (if not said) or TLS13
//	  client_auth_type      NoClientCert (if not said) or RequireAndVerifyClientCert
//	  client_ca_file        authorities of the clients, PEM
//	basic_auth_users:
//	  NAME: HASH
//
// It is read anew for each request and each connection, and so are the files that it names: a
// password or a certificate is renewed while the agent runs.
package access

import (
	"bytes"
	"errors"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"slices"
	"strings"

	"go.yaml.in/yaml/v3"
	"golang.org/x/crypto/bcrypt"
)

// Terms are what a file asks of those who look.
type Terms struct {
	TLS         bool // nothing goes over the network as it is
	Password    bool
	Certificate bool // of theirs, by an authority that the file names
}

// Authenticates tells whether nobody is answered whom the file does not know.
func (t Terms) Authenticates() bool { return t.Password || t.Certificate }

// file is what is written there.
type file struct {
	TLS   *server           `yaml:"tls_server_config"`
	Users map[string]string `yaml:"basic_auth_users"` // bcrypt hashes by name
}

// server is what the agent shows of itself, and what it wants to see of clients.
type server struct {
	Cert       string `yaml:"cert_file"`
	Key        string `yaml:"key_file"`
	MinVersion string `yaml:"min_version"`
	ClientAuth string `yaml:"client_auth_type"`
	ClientCA   string `yaml:"client_ca_file"`
}

// wantsCertificate is the client_auth_type that lets nobody in without a certificate.
const wantsCertificate = "RequireAndVerifyClientCert"

// terms tells what the file asks.
func (f *file) terms() Terms {
	return Terms{TLS: f.TLS != nil, Password: len(f.Users) > 0, Certificate: f.TLS != nil && f.TLS.ClientAuth == wantsCertificate}
}

// read reads a file, but none of those that it names.
func read(path string) (*file, error) {
	text, err := os.ReadFile(path)
	if err != nil {
		return nil, err
	}
	f := new(file)
	d := yaml.NewDecoder(bytes.NewReader(text))
	d.KnownFields(true)
	if err := d.Decode(f); err != nil && !errors.Is(err, io.EOF) {
		return nil, errors.New(strings.Join(strings.Fields(err.Error()), " "))
	}
	if f.TLS != nil {
		for _, name := range []*string{&f.TLS.Cert, &f.TLS.Key, &f.TLS.ClientCA} {
			if *name != "" && !filepath.IsAbs(*name) {
				*name = filepath.Join(filepath.Dir(path), *name)
			}
		}
	}
	return f, nil
}

// Check reads the file at path and those that it names, and says what it asks, or what of it is
// wrong.
func Check(path string) (Terms, error) {
	f, err := read(path)
	if err == nil {
		err = f.check()
	}
	if err != nil {
		return Terms{}, fmt.Errorf("web configuration %q: %w", path, err)
	}
	return f.terms(), nil
}

func (f *file) check() error {
	err := f.checkUsers()
	if f.TLS != nil {
		_, wrong := f.TLS.config()
		err = errors.Join(err, wrong)
	}
	return err
}

// checkUsers wants a hash where a password is in its place.
func (f *file) checkUsers() error {
	var wrong []string
	for name, hash := range f.Users {
		if _, err := bcrypt.Cost([]byte(hash)); err != nil {
			wrong = append(wrong, fmt.Sprintf("%q", name))
		}
	}
	if len(wrong) == 0 {
		return nil
	}
	slices.Sort(wrong)
	return fmt.Errorf("basic_auth_users: what stands for %s is no bcrypt hash; htpasswd -nBC 10 NAME makes one", strings.Join(wrong, ", "))
}
