package main

import (
	"bytes"
	"context"
	"errors"
	"image/png"
	"net/http"
	"net/http/httptest"
	"os"
	"os/exec"
	"path/filepath"
	"regexp"
	"strings"
	"sync"
	"testing"
	"time"
)

// browserLimit is how long one start of the browser may take before it counts
// as hung; it usually takes a second or two.
const browserLimit = 2 * time.Minute

// browser returns the path of Chromium. Without it the test is skipped, but
// where CI is set it fails: there the browser is installed.
func browser(t *testing.T) string {
	t.Helper()
	if testing.Short() {
		t.Skip("-short: no browser is started")
	}
	for _, name := range []string{"chromium", "chromium-browser", "google-chrome", "chrome"} {
		if path, err := exec.LookPath(name); err == nil {
			return path
		}
	}
	if os.Getenv("CI") != "" {
		t.Fatal("no Chromium found, and CI is set: install it")
	}
	t.Skip("no Chromium found: the report is not opened in a browser")
	return ""
}

// ownService matches the hosts that the browser asks for its own sake: time,
// updates, accounts.
var ownService = regexp.MustCompile(`(^|\.)(google|googleapis|gstatic|gvt1)\.com(:\d+)?$`)

// look opens a page in a browser of its own and returns what it prints on
// standard output and what is wrong with the page: messages on the console,
// and requests, which all go to a proxy that answers none.
func look(t *testing.T, page string, args ...string) (stdout string, faults []string) {
	t.Helper()
	var mutex sync.Mutex
	var requests []string
	proxy := httptest.NewServer(http.HandlerFunc(func(w http.ResponseWriter, r *http.Request) {
		if !ownService.MatchString(r.Host) {
			mutex.Lock()
			requests = append(requests, "request: "+r.Method+" "+r.RequestURI)
			mutex.Unlock()
		}
		w.WriteHeader(http.StatusForbidden)
	}))
	defer proxy.Close()
	ctx, cancel := context.WithTimeout(t.Context(), browserLimit)
	defer cancel()
	all := append([]string{
		"--headless", "--no-sandbox", "--disable-gpu", "--no-first-run", "--disable-background-networking",
		"--disable-component-update", "--disable-sync", "--disable-dev-shm-usage", "--hide-scrollbars",
		"--enable-logging=stderr", "--user-data-dir=" + t.TempDir(),
		"--disable-default-apps", "--disable-domain-reliability", "--disable-client-side-phishing-detection", "--metrics-recording-only",
		"--proxy-server=" + proxy.Listener.Addr().String(), "--proxy-bypass-list=<-loopback>",
	}, args...)
	cmd := exec.CommandContext(ctx, browser(t), append(all, "file://"+page)...)
	cmd.WaitDelay = 5 * time.Second
	var out, errs bytes.Buffer
	cmd.Stdout, cmd.Stderr = &out, &errs
	err := cmd.Run()
	if err != nil && !errors.Is(err, exec.ErrWaitDelay) {
		t.Fatalf("browser: %v\n%s", err, errs.String())
	}
	for line := range strings.Lines(errs.String()) {
		if strings.Contains(line, "CONSOLE") {
			faults = append(faults, strings.TrimSpace(line))
		}
	}
	mutex.Lock()
	defer mutex.Unlock()
	return out.String(), append(faults, requests...)
}

// writePage stores a page in a folder of its own.
func writePage(t *testing.T, html string) string {
	t.Helper()
	file := filepath.Join(t.TempDir(), "page.html")
	if err := os.WriteFile(file, []byte(html), 0o600); err != nil {
		t.Fatal(err)
	}
	return file
}

// The browser notices what the tests below look for: a script that fails, and
// requests to the network.
func TestBrowserSeesFaults(t *testing.T) {
	file := writePage(t, `<!DOCTYPE html><title>x</title><img src="http://harbour.invalid/a.png"><script>console.error("broken")</script>`)
	_, faults := look(t, file, "--dump-dom")
	all := strings.Join(faults, "\n")
	if !strings.Contains(all, "broken") || !strings.Contains(all, "GET http://harbour.invalid/a.png") {
		t.Errorf("found %q", all)
	}
}

// The report opens without errors and without a request, with its headings,
// tables and pictures in place.
func TestReportInBrowser(t *testing.T) {
	dom, faults := look(t, writePage(t, buoysPage(t)), "--dump-dom")
	if len(faults) > 0 {
		t.Error(strings.Join(faults, "\n"))
	}
	for part, least := range map[string]int{
		`<h1`: 1, `<h2`: 5, `<h3`: 6, `<table`: 4, `<th scope="col"`: 20, `<caption`: 4,
		`<figure`: 4, `<svg role="img" aria-label="`: 4, `<path`: 50, `<text`: 50, `<figcaption`: 4,
	} {
		if n := strings.Count(dom, part); n < least {
			t.Errorf("%d of %s in the document, want %d at least", n, part, least)
		}
	}
	if n := strings.Count(dom, "<script"); n > 0 {
		t.Errorf("%d scripts", n)
	}
}

// In light and dark the page has the background of its scheme, and enough on
// it: the pictures are drawn in both.
func TestReportInLightAndDark(t *testing.T) {
	file := writePage(t, buoysPage(t))
	for _, c := range []struct {
		scheme    string
		low, high uint32 // of the background's brightness, of 65535
	}{{"1", 0xF000, 0xFFFF}, {"0", 0, 0x3000}} {
		shot := filepath.Join(t.TempDir(), "shot.png")
		_, faults := look(t, file, "--blink-settings=preferredColorScheme="+c.scheme, "--window-size=900,3000", "--screenshot="+shot)
		if len(faults) > 0 {
			t.Error(strings.Join(faults, "\n"))
		}
		f, err := os.Open(shot)
		if err != nil {
			t.Fatal(err)
		}
		defer f.Close()
		img, err := png.Decode(f)
		if err != nil {
			t.Fatal(err)
		}
		_, background, _, _ := img.At(3, 3).RGBA()
		if background < c.low || background > c.high {
			t.Errorf("scheme %s: background %#x, want %#x to %#x", c.scheme, background, c.low, c.high)
		}
		b := img.Bounds()
		different, wide := 0, 0
		for y := b.Min.Y; y < b.Max.Y; y++ {
			for x := b.Min.X; x < b.Max.X; x++ {
				if _, g, _, _ := img.At(x, y).RGBA(); g > background+0x2000 || g+0x2000 < background {
					different++
					if x < 20 || x >= b.Max.X-20 {
						wide++
					}
				}
			}
		}
		if share := float64(different) / float64(b.Dx()*b.Dy()); share < 0.01 || share > 0.5 {
			t.Errorf("scheme %s: %.1f %% of the page is not background", c.scheme, 100*share)
		}
		if wide > 0 {
			t.Errorf("scheme %s: %d points within the margins of the window: something is too wide", c.scheme, wide)
		}
	}
}

// On paper it is A4, a few pages.
func TestReportOnPaper(t *testing.T) {
	file := writePage(t, buoysPage(t))
	pdf := filepath.Join(t.TempDir(), "page.pdf")
	if _, faults := look(t, file, "--print-to-pdf="+pdf, "--no-pdf-header-footer"); len(faults) > 0 {
		t.Error(strings.Join(faults, "\n"))
	}
	content, err := os.ReadFile(pdf)
	if err != nil || !bytes.HasPrefix(content, []byte("%PDF-")) {
		t.Fatalf("%v, %d bytes", err, len(content))
	}
	boxes := regexp.MustCompile(`/MediaBox ?\[ ?0 0 (\d+)[.\d]* (\d+)[.\d]* ?\]`).FindAllSubmatch(content, -1)
	if len(boxes) < 3 || len(boxes) > 10 {
		t.Errorf("%d pages", len(boxes))
	}
	for _, box := range boxes {
		if string(box[1]) != "594" && string(box[1]) != "595" || string(box[2]) != "841" && string(box[2]) != "842" {
			t.Errorf("a page of %s by %s points, want 595 by 842", box[1], box[2])
		}
	}
}
