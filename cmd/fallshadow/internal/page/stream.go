package page

import (
	"crypto/rand"
	"encoding/json"
	"fmt"
	"net/http"
	"strconv"
	"strings"
	"sync"
	"time"
)

// stream sends events to all browsers (server-sent events, HTML standard, section 9.2).
// One that lost its connection says the last event that it saw and gets those after it, or
// word that it missed too many and must read everything again.
type stream struct {
	start string // tells this run of the program from others

	mu      sync.Mutex
	next    int     // number of the next event
	kept    []event // the last ones
	clients map[chan event]bool
}

type event struct {
	number     int
	kind, data string
}

const (
	// keep is how many events are kept for who comes back.
	keep = 256
	// pending is how many events may wait for one browser; a slower one is cut off and
	// catches up when it comes back.
	pending = 64
	// beat is how often a silent stream shows that it lives; live.js counts on it.
	beat = 10 * time.Second
	// patience is how long a browser may take to accept an event.
	patience = 10 * time.Second
)

func newStream() *stream {
	return &stream{start: rand.Text()[:8], next: 1, clients: map[chan event]bool{}}
}

// send sends an event to everyone; it does not wait for anybody.
func (s *stream) send(kind string, value any) {
	data, err := json.Marshal(value)
	if err != nil {
		return // a value of our own that JSON has no form for: tests find it
	}
	s.mu.Lock()
	defer s.mu.Unlock()
	e := event{s.next, kind, string(data)}
	s.next++
	s.kept = append(s.kept, e)
	if len(s.kept) > 2*keep {
		s.kept = append([]event(nil), s.kept[len(s.kept)-keep:]...)
	}
	for c := range s.clients {
		select {
		case c <- e:
		default:
			delete(s.clients, c)
			close(c)
		}
	}
}

// join adds a browser and returns what it missed since an event, by the name that the
// event had.
func (s *stream) join(after string) (c chan event, missed []event) {
	s.mu.Lock()
	defer s.mu.Unlock()
	c = make(chan event, pending)
	s.clients[c] = true
	start, number, _ := strings.Cut(after, "-")
	last, err := strconv.Atoi(number)
	oldest := s.next
	if len(s.kept) > 0 {
		oldest = s.kept[0].number
	}
	if start != s.start || err != nil || last < oldest-1 || last >= s.next {
		return c, []event{{s.next - 1, "begin", "null"}}
	}
	return c, append([]event(nil), s.kept[last+1-oldest:]...)
}

func (s *stream) leave(c chan event) {
	s.mu.Lock()
	defer s.mu.Unlock()
	if s.clients[c] {
		delete(s.clients, c)
		close(c)
	}
}

// serve is the stream of one browser.
func (s *stream) serve(w http.ResponseWriter, r *http.Request) {
	after := r.Header.Get("Last-Event-ID")
	if after == "" {
		after = r.URL.Query().Get("after")
	}
	c, missed := s.join(after)
	defer s.leave(c)
	w.Header().Set("Content-Type", "text/event-stream")
	out := http.NewResponseController(w)
	write := func(text string) bool {
		out.SetWriteDeadline(time.Now().Add(patience))
		_, err := w.Write([]byte(text))
		return err == nil && out.Flush() == nil
	}
	if !write("retry: 1000\n\n") {
		return
	}
	for _, e := range missed {
		if !write(s.text(e)) {
			return
		}
	}
	alive := time.NewTicker(beat)
	defer alive.Stop()
	for {
		text := "event: beat\ndata: null\n\n"
		select {
		case e, ok := <-c:
			if !ok {
				return
			}
			text = s.text(e)
		case <-alive.C:
		case <-r.Context().Done():
			return
		}
		if !write(text) {
			return
		}
	}
}

// text is an event as it is sent. JSON has no line breaks.
func (s *stream) text(e event) string {
	return fmt.Sprintf("id: %s\nevent: %s\ndata: %s\n\n", s.id(e.number), e.kind, e.data)
}

func (s *stream) id(number int) string { return s.start + "-" + strconv.Itoa(number) }

// last is the id of the last event.
func (s *stream) last() string {
	s.mu.Lock()
	defer s.mu.Unlock()
	return s.id(s.next - 1)
}
