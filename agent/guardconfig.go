package agent

import (
	"crypto/x509"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"slices"
	"strings"

	"github.com/prometheus/exporter-toolkit/web"
	"go.yaml.in/yaml/v2"
	"golang.org/x/crypto/bcrypt"
)

// terms are what a web configuration file asks of those who look.
type terms struct {
	tls         bool
	password    bool
	certificate bool // of theirs, by an authority that the file names
}

// authenticates tells whether nobody is answered whom the file does not know.
func (t terms) authenticates() bool { return t.password || t.certificate }

// readTerms reads a web configuration as the toolkit reads it for each request. It does not look
// at the files that are named in it.
func readTerms(path string) (terms, *web.Config, error) {
	text, err := os.ReadFile(path)
	if err != nil {
		return terms{}, nil, err
	}
	c := new(web.Config)
	if err := yaml.UnmarshalStrict(text, c); err != nil {
		return terms{}, nil, errors.New(strings.Join(strings.Fields(err.Error()), " "))
	}
	t := &c.TLSConfig
	t.SetDirectory(filepath.Dir(path))
	return terms{
		tls:         t.IsEnabled(),
		password:    len(c.Users) > 0,
		certificate: t.ClientAuth == "RequireAndVerifyClientCert" && (t.ClientCAs != "" || t.ClientCAsText != ""),
	}, c, nil
}

// checkWebConfig reads a web configuration, and says what is wrong with it or with what it names.
func checkWebConfig(path string) (terms, error) {
	a, c, err := readTerms(path)
	if err == nil {
		err = errors.Join(checkUsers(c), checkTLS(&c.TLSConfig))
	}
	if err == nil {
		err = web.Validate(path)
	}
	if err != nil {
		return terms{}, fmt.Errorf("web configuration %q: %w", path, err)
	}
	return a, nil
}

// checkUsers wants a hash where a password is in its place.
func checkUsers(c *web.Config) error {
	var wrong []string
	for name, hash := range c.Users {
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

// checkTLS wants certificate and key to be there, and an authority in the file of the clients'.
func checkTLS(t *web.TLSConfig) error {
	if !t.IsEnabled() {
		return nil
	}
	c, err := web.ConfigToTLSConfig(t)
	switch {
	case err != nil:
		return fmt.Errorf("tls_server_config: %w", err)
	case c.ClientCAs != nil && c.ClientCAs.Equal(x509.NewCertPool()):
		return errors.New("tls_server_config: client_ca_file holds no certificate")
	}
	return nil
}
