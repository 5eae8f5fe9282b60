package main

import (
	"bytes"
	"context"
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"sync"
	"time"

	"tannery/cmd/tannery/internal/brief"
	"tannery/optimize"
)

// checkpointInterval is the least time between two writings of a checkpoint:
// what a crash costs at most, beside the piece of work under way.
const checkpointInterval = time.Second

// checkpointVersion is that of the form of checkpoints.
const checkpointVersion = 1

// The kinds of checkpoints: of search, of sweep and tradeoff, and of simulate.
const (
	searchKind      = "checkpoint"
	seriesKind      = "series"
	measurementKind = "measurement"
)

// checkpointKinds says for each kind what is continued from it, and what
// another one of the kind belongs to.
var checkpointKinds = map[string]struct{ name, other string }{
	searchKind:      {"search", "another brief or seed"},
	seriesKind:      {"series", "another series: of other searches, or in another order"},
	measurementKind: {"measurement", "another measurement: of another matrix, channel, values, iterations, schedule or seed"},
}

// checkpointFile is what a checkpoint holds, as one JSON object.
type checkpointFile struct {
	Kind    string          `json:"kind"` // one of checkpointKinds
	Version int             `json:"version"`
	Program string          `json:"program"`
	Brief   json.RawMessage `json:"brief"`  // what is searched for
	Digest  string          `json:"digest"` // SHA-256 of what precedes and of State
	State   json.RawMessage `json:"state"`  // of the search
}

// digest protects against damage.
func (c checkpointFile) digest() string {
	h := sha256.New()
	for _, part := range [][]byte{[]byte(c.Kind), []byte(c.Program), c.Brief, c.State} {
		fmt.Fprintf(h, "%d %d\n", c.Version, len(part))
		h.Write(part)
	}
	return hex.EncodeToString(h.Sum(nil))
}

// checkpoint keeps the state of a search in a file: written whole or not at
// all, at most once in checkpointInterval, by a goroutine of its own. A lock
// beside it keeps other processes away.
type checkpoint struct {
	path string
	lock *os.File
	out  *outputFile
	head checkpointFile // without state

	mu      sync.Mutex
	pending []byte
	failed  error
	wake    chan struct{}
	stop    chan struct{}
	done    chan struct{}
}

// openCheckpoint locks the checkpoint and returns the state in it, nil if
// there is none yet. One that is damaged, or of another search, is refused
// and left as it is.
func openCheckpoint(path string, b brief.Brief, m optimize.Method) (c *checkpoint, state []byte, err error) {
	head, err := checkpointHead(b, m)
	if err != nil {
		return nil, nil, err
	}
	return openState(path, head)
}

// openState is openCheckpoint for whatever the head identifies.
func openState(path string, head checkpointFile) (c *checkpoint, state []byte, err error) {
	if path == "" || path == "-" {
		return nil, nil, usagef("--checkpoint %q: must be a file name", path)
	}
	c = &checkpoint{path: path, head: head, wake: make(chan struct{}, 1), stop: make(chan struct{}), done: make(chan struct{})}
	// Beside the file itself, so that a symbolic link to it is no second way in.
	named := path
	if target, err := filepath.EvalSymlinks(path); err == nil {
		named = target
	}
	lock, ok, err := lockFile(named + ".lock")
	switch {
	case err != nil:
		return nil, nil, outputError("--checkpoint", path, err)
	case !ok:
		return nil, nil, usagef("%s: found in use by another process; allowed: to wait for it, or another --checkpoint", path)
	}
	c.lock = lock
	if state, err = c.read(); err == nil {
		c.out, err = openOutput("--checkpoint", path)
	}
	if err != nil {
		unlockFile(lock)
		return nil, nil, err
	}
	go c.write()
	return c, state, nil
}

// checkpointHead identifies a search. Titles and the way to a result (time,
// workers) do not matter.
func checkpointHead(b brief.Brief, m optimize.Method) (checkpointFile, error) {
	b.Title, b.Method = "", m.Name()
	tree, err := asked(b)
	if err != nil {
		return checkpointFile{}, err
	}
	text, err := tree.MarshalJSON()
	if err != nil {
		return checkpointFile{}, err
	}
	compact, err := json.Marshal(json.RawMessage(text)) // as it will be read back
	return checkpointFile{Kind: searchKind, Version: checkpointVersion, Program: program, Brief: compact}, err
}

// read returns the state in the file, nil if there is no file.
func (c *checkpoint) read() ([]byte, error) {
	info, err := os.Stat(c.path)
	switch {
	case errors.Is(err, fs.ErrNotExist):
		return nil, nil
	case err != nil:
		return nil, invalid(inputError(c.path, err))
	case !info.Mode().IsRegular():
		return nil, usagef("--checkpoint %s: found what is no file; allowed: a file", c.path)
	}
	content, _, err := readInput(context.Background(), c.path, nil)
	if err != nil {
		return nil, err
	}
	return c.decode(content)
}

// decode returns the state in a checkpoint of this search.
func (c *checkpoint) decode(content []byte) ([]byte, error) {
	var found checkpointFile
	decoder := json.NewDecoder(bytes.NewReader(content))
	decoder.DisallowUnknownFields()
	err := decoder.Decode(&found)
	if err == nil {
		if _, more := decoder.Token(); more != io.EOF {
			err = errors.New("more after its end")
		}
	}
	other, this := checkpointKinds[c.head.Kind].other, checkpointKinds[c.head.Kind].name
	allowed := "allowed: that of this " + this + ", another --checkpoint, or to remove the file and start anew"
	foreign, known := checkpointKinds[found.Kind]
	switch {
	case err == nil && known && found.Kind != c.head.Kind:
		return nil, usagef("%s: found the checkpoint of a %s; %s", c.path, foreign.name, allowed)
	case err != nil || !known:
		return nil, usagef("%s: found no checkpoint, or a damaged one; %s", c.path, allowed)
	case found.Version != c.head.Version || found.Program != c.head.Program:
		return nil, usagef("%s: found the checkpoint of %s, version %d; allowed: that of %s, version %d, another --checkpoint, or to remove the file and start anew",
			c.path, found.Program, found.Version, c.head.Program, c.head.Version)
	case found.Digest != found.digest():
		return nil, usagef("%s: found a damaged checkpoint, which does not match its digest; %s", c.path, allowed)
	case !bytes.Equal(found.Brief, c.head.Brief):
		return nil, usagef("%s: found the checkpoint of %s; %s", c.path, other, allowed)
	}
	// Keys twice or in capitals, which the decoder lets pass, were not written
	// by this program either.
	again, err := c.encode(found.State)
	var compact bytes.Buffer
	if err != nil || json.Compact(&compact, content) != nil || !bytes.Equal(bytes.TrimSpace(again), compact.Bytes()) {
		return nil, usagef("%s: found no checkpoint, or a damaged one; %s", c.path, allowed)
	}
	return found.State, nil
}

// keep takes a state to be written soon. It is optimize.Settings.Checkpoint.
func (c *checkpoint) keep(state []byte) {
	c.mu.Lock()
	c.pending = state
	c.mu.Unlock()
	select {
	case c.wake <- struct{}{}:
	default:
	}
}

// write writes what is pending until the checkpoint is closed.
func (c *checkpoint) write() {
	defer close(c.done)
	for {
		select {
		case <-c.wake:
			c.store()
		case <-c.stop:
			c.store()
			return
		}
		select {
		case <-time.After(checkpointInterval):
		case <-c.stop:
			c.store()
			return
		}
	}
}

// store writes what is pending, if anything.
func (c *checkpoint) store() {
	c.mu.Lock()
	state := c.pending
	c.pending = nil
	c.mu.Unlock()
	if state == nil {
		return
	}
	content, err := c.encode(state)
	if err == nil {
		err = c.out.write(content)
	}
	c.failed = err
}

// encode is the inverse of decode.
func (c *checkpoint) encode(state []byte) ([]byte, error) {
	file := c.head
	file.State = state
	file.Digest = file.digest()
	content, err := json.Marshal(file)
	return append(content, '\n'), err
}

// close writes what is pending and gives the lock back; with the search done,
// the file is removed. The error is that of the last writing.
func (c *checkpoint) close(done bool) error {
	if c == nil {
		return nil
	}
	close(c.stop)
	<-c.done
	if done {
		os.Remove(c.out.path)
	}
	unlockFile(c.lock)
	return c.failed
}
