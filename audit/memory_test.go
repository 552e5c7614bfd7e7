package audit

import (
	"fmt"
	"runtime"
	"runtime/debug"
	"runtime/metrics"
	"testing"
	"time"

	"fettle/filter"
	"fettle/filter/stream/machine"
)

// kaiser10k is a linear-phase low-pass whose length its transition decides.
const kaiser10k = "phase: linear\nstages: [{lowpass: {pass: 10 kHz, stop: %g Hz, reject: 80 dB, family: kaiser}}]"

// A render has 80 MiB for kernels of up to 65,536 taps. The program itself takes 12, an
// engine and its buffers for such a kernel 36; the audit runs beside them, so design and
// audit must do with 24, garbage apart. Measured at 13 and 20 MB; a recursive comb of
// notches 3 Hz wide, which rings for 208,398 samples, comes to 40.
func TestAuditTakesLittleMemory(t *testing.T) {
	for _, c := range []struct {
		name, text  string
		taps        int
		live, total float64 // MB: at most at once, and allocated in all
	}{
		{"short", fmt.Sprintf(kaiser10k, 10060.0), 4021, 18, 70},
		{"long", fmt.Sprintf(kaiser10k, 10003.98), 65437, 24, 160},
		{"notches", "phase: iir\nstages: [{hum: {mains: 50 Hz, harmonics: 8, width: 3 Hz}}]", 0, 48, 260},
	} {
		chain, err := filter.Parse([]byte(c.text), "chain.yaml")
		if err != nil {
			t.Fatal(err)
		}
		live, total := memoryOf(func() {
			f, err := chain.Realise(48000, filter.Written)
			if err != nil {
				t.Fatal(err)
			}
			if n := len(f.Paths()[0].System.Taps); n != c.taps {
				t.Errorf("%s: %d taps, want %d", c.name, n, c.taps)
			}
			if _, err := Chain(f, machine.Best()); err != nil {
				t.Fatal(err)
			}
		})
		t.Logf("%s: %.1f MB live at most, %.1f MB allocated", c.name, live, total)
		if !(live <= c.live) || !(total <= c.total) {
			t.Errorf("%s: %.1f MB live at most, allowed %g; %.1f MB allocated, allowed %g", c.name, live, c.live, total, c.total)
		}
	}
}

// memoryOf runs do and tells, in MB, the most that was live at once and all that was
// allocated. The collector is made to run whenever the heap has grown by a twentieth, so
// that it misses little.
func memoryOf(do func()) (live, total float64) {
	defer debug.SetGCPercent(debug.SetGCPercent(5))
	runtime.GC()
	var before, after runtime.MemStats
	runtime.ReadMemStats(&before)
	stop, most := make(chan bool), make(chan uint64)
	go func() {
		sample, peak := []metrics.Sample{{Name: "/gc/heap/live:bytes"}}, uint64(0)
		for {
			metrics.Read(sample)
			peak = max(peak, sample[0].Value.Uint64())
			select {
			case <-stop:
				most <- peak
				return
			default:
				time.Sleep(100 * time.Microsecond)
			}
		}
	}()
	do()
	stop <- true
	peak := <-most
	runtime.ReadMemStats(&after)
	return float64(peak-before.HeapAlloc) / 1e6, float64(after.TotalAlloc-before.TotalAlloc) / 1e6
}

// BenchmarkAudit audits kernels of 4,021 and 65,437 taps and a recursive comb.
func BenchmarkAudit(b *testing.B) {
	for _, c := range []struct{ name, text string }{
		{"4021", fmt.Sprintf(kaiser10k, 10060.0)},
		{"65437", fmt.Sprintf(kaiser10k, 10003.98)},
		{"iir", "phase: iir\nstages: [{highpass: {at: 70 Hz, order: 4}}]"},
	} {
		chain, err := filter.Parse([]byte(c.text), "chain.yaml")
		if err != nil {
			b.Fatal(err)
		}
		b.Run("design/"+c.name, func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				if _, err := chain.Realise(48000, filter.Written); err != nil {
					b.Fatal(err)
				}
			}
		})
		f, err := chain.Realise(48000, filter.Written)
		if err != nil {
			b.Fatal(err)
		}
		b.Run("audit/"+c.name, func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				if _, err := Chain(f, machine.Best()); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}
