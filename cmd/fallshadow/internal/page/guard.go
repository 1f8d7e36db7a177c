package page

import (
	"crypto/rand"
	"crypto/subtle"
	"fmt"
	"net"
	"net/http"
	"net/netip"
	"net/url"
	"os"
	"slices"
	"strconv"
	"strings"
)

// guard decides who may see the page and who may change things: under the names of this
// address only, so that no foreign site can reach it by a name of its own; beyond this
// machine only with the token; changes only from the page itself.
type guard struct {
	address *net.TCPAddr
	name    string // host as a person gave it
	token   string // "" on this machine alone
	hosts   []string
}

// cookie is the name under which a browser keeps the token. The port is part of it: a browser
// sends the cookies of a machine to all its ports, and there may be a page at several.
func (g *guard) cookie() string { return "fallshadow" + strconv.Itoa(g.address.Port) }

// newGuard makes the guard of an address. Without a token one is made up where it is
// needed.
func newGuard(a *net.TCPAddr, asked, token string) (guard, error) {
	host, _, err := net.SplitHostPort(asked)
	if err != nil {
		return guard{}, fmt.Errorf("address of the page: %w", err)
	}
	g := guard{address: a, name: host, hosts: []string{host}}
	if a.IP.IsLoopback() {
		g.hosts = []string{host, "localhost", "127.0.0.1", "::1"}
		return g, nil
	}
	if g.token = token; token == "" {
		g.token = rand.Text()
	}
	if name, err := os.Hostname(); err == nil {
		g.hosts = append(g.hosts, name, name+".local", strings.SplitN(name, ".", 2)[0])
	}
	addresses, err := net.InterfaceAddrs()
	if err != nil {
		return guard{}, fmt.Errorf("addresses of this machine: %w", err)
	}
	for _, a := range addresses {
		if p, err := netip.ParsePrefix(a.String()); err == nil {
			g.hosts = append(g.hosts, p.Addr().WithZone("").String())
		}
	}
	return g, nil
}

// url is the address for a person, with the token where there is one.
func (g *guard) url() string {
	host := g.name
	if ip := g.address.IP; ip.IsUnspecified() || host == "" {
		host = "127.0.0.1"
		if name, err := os.Hostname(); err == nil {
			host = name
		}
	}
	u := url.URL{Scheme: "http", Host: net.JoinHostPort(host, strconv.Itoa(g.address.Port)), Path: "/"}
	if g.token != "" {
		u.RawQuery = url.Values{"token": {g.token}}.Encode()
	}
	return u.String()
}

// protect wraps all that is served.
func (g *guard) protect(next http.Handler) http.Handler {
	return http.HandlerFunc(func(w http.ResponseWriter, r *http.Request) {
		h := w.Header()
		h.Set("Content-Security-Policy", "default-src 'self'; base-uri 'none'; form-action 'none'; frame-ancestors 'none'; object-src 'none'")
		h.Set("X-Content-Type-Options", "nosniff")
		h.Set("Referrer-Policy", "no-referrer")
		h.Set("Cross-Origin-Resource-Policy", "same-origin")
		h.Set("Cache-Control", "no-store")
		switch {
		case !g.isOurs(r.Host):
			http.Error(w, "this page is not served under the name "+strconv.Quote(r.Host), http.StatusForbidden)
		case g.token != "" && r.URL.Query().Has("token") && r.Method == http.MethodGet:
			g.admit(w, r)
		case g.token != "" && !g.admitted(r):
			http.Error(w, "open the page with the address that the program printed: it holds the token", http.StatusForbidden)
		case r.Method == http.MethodPost && !fromPage(r):
			http.Error(w, "changes are taken from the page alone", http.StatusForbidden)
		default:
			next.ServeHTTP(w, r)
		}
	})
}

// isOurs reports whether a Host header names this address and port.
func (g *guard) isOurs(hostport string) bool {
	host, port, err := net.SplitHostPort(hostport)
	if err != nil {
		host, port = strings.Trim(hostport, "[]"), "80"
	}
	return port == strconv.Itoa(g.address.Port) &&
		slices.ContainsFunc(g.hosts, func(h string) bool { return h != "" && strings.EqualFold(h, host) })
}

// admit takes the token out of an address and keeps it as a cookie.
func (g *guard) admit(w http.ResponseWriter, r *http.Request) {
	if !same(r.URL.Query().Get("token"), g.token) {
		http.Error(w, "the token is not the one that the program printed", http.StatusForbidden)
		return
	}
	http.SetCookie(w, &http.Cookie{Name: g.cookie(), Value: g.token, Path: "/", HttpOnly: true, SameSite: http.SameSiteStrictMode})
	http.Redirect(w, r, "/", http.StatusSeeOther)
}

func (g *guard) admitted(r *http.Request) bool {
	c, err := r.Cookie(g.cookie())
	return err == nil && same(c.Value, g.token)
}

func same(a, b string) bool { return subtle.ConstantTimeCompare([]byte(a), []byte(b)) == 1 }

// fromPage reports whether a change was asked for by our own page: browsers name the
// origin of every POST, and no foreign page can send JSON without being asked first.
func fromPage(r *http.Request) bool {
	return r.Header.Get("Origin") == "http://"+r.Host && r.Header.Get("Content-Type") == "application/json"
}
