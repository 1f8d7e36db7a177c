package page

import (
	"compress/gzip"
	"encoding/json"
	"errors"
	"io"
	"net/http"
	"strings"
)

// refusal is an error whose fault lies with the asker.
type refusal struct {
	status int
	text   string
}

func (r *refusal) Error() string { return r.text }

// answer makes a handler of what returns a value for JSON; nil is no content.
func answer(f func(*http.Request) (any, error)) http.Handler {
	return http.HandlerFunc(func(w http.ResponseWriter, r *http.Request) {
		v, err := f(r)
		var refused *refusal
		switch {
		case errors.As(err, &refused):
			http.Error(w, refused.text, refused.status)
		case err != nil:
			http.Error(w, err.Error(), http.StatusInternalServerError)
		case v == nil:
			w.WriteHeader(http.StatusNoContent)
		default:
			w.Header().Set("Content-Type", "application/json")
			json.NewEncoder(w).Encode(v)
		}
	})
}

// packed compresses what is text.
func packed(next http.Handler) http.Handler {
	return http.HandlerFunc(func(w http.ResponseWriter, r *http.Request) {
		if !strings.Contains(r.Header.Get("Accept-Encoding"), "gzip") {
			next.ServeHTTP(w, r)
			return
		}
		r.Header.Del("Range")
		z := &packer{ResponseWriter: w}
		defer z.close()
		next.ServeHTTP(z, r)
	})
}

// packer packs a body once it is known that there is one.
type packer struct {
	http.ResponseWriter
	zip *gzip.Writer
	set bool
}

func (p *packer) WriteHeader(status int) {
	if !p.set && status == http.StatusOK {
		h := p.Header()
		h.Del("Content-Length")
		h.Set("Content-Encoding", "gzip")
		h.Add("Vary", "Accept-Encoding")
		p.zip = gzip.NewWriter(p.ResponseWriter)
	}
	p.set = true
	p.ResponseWriter.WriteHeader(status)
}

func (p *packer) Write(b []byte) (int, error) {
	if !p.set {
		if p.Header().Get("Content-Type") == "" {
			p.Header().Set("Content-Type", http.DetectContentType(b))
		}
		p.WriteHeader(http.StatusOK)
	}
	if p.zip != nil {
		return p.zip.Write(b)
	}
	return p.ResponseWriter.Write(b)
}

func (p *packer) close() {
	if p.zip != nil {
		p.zip.Close()
	}
}

// decode reads the JSON of a change, of a bounded size.
func decode(r *http.Request, into any) error {
	d := json.NewDecoder(io.LimitReader(r.Body, 4096))
	d.DisallowUnknownFields()
	if err := d.Decode(into); err != nil {
		return &refusal{http.StatusBadRequest, "the request cannot be read: " + err.Error()}
	}
	return nil
}
