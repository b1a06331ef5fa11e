package model

import (
	"bytes"
	"crypto/sha256"
	"encoding/binary"
	"errors"
	"io"
	"math"
	"math/rand/v2"
	"runtime"
	"strings"
	"testing"
	"testing/iotest"
)

// framed puts a payload between a head and a checksum that fit it.
func framed(payload []byte) []byte {
	b := append(appendHead(nil, uint64(len(payload))), payload...)
	sum := sha256.Sum256(b)
	return append(b, sum[:]...)
}

// payloadOf is a snapshot's payload.
func payloadOf(t testing.TB, s *Snapshot) []byte {
	b := saved(t, s)
	return bytes.Clone(b[headLen : len(b)-sha256.Size])
}

func TestForeignAndCutFilesAreRefused(t *testing.T) {
	whole := saved(t, handmade(t))
	version2 := bytes.Clone(whole)
	binary.LittleEndian.PutUint32(version2[len(magic):], 2)
	endless := bytes.Clone(whole)
	binary.LittleEndian.PutUint64(endless[len(magic)+4:], math.MaxUint64)
	longer := bytes.Clone(whole)
	binary.LittleEndian.PutUint64(longer[len(magic)+4:], 1<<39)
	textual := bytes.Replace(whole, []byte("\r\n"), []byte("\n"), 1)
	for name, c := range map[string]struct {
		b    []byte
		says string
	}{
		"empty":     {nil, "cut short after 0 bytes, 20 more"},
		"text":      {[]byte("weight_g,cultivar,grade\n152,Topaz,extra\n"), `it begins with "weight_g"`},
		"as text":   {textual, "it begins with"},
		"version":   {version2, "its version is 2; this program reads version 1"},
		"endless":   {endless, "it claims a length of"},
		"longer":    {longer, "more were expected"},
		"head only": {whole[:headLen], "cut short after 20 bytes"},
		"no sum":    {whole[:len(whole)-1], "1 more were expected"},
		"empty payload": {framed(nil),
			"ends in the middle of a value"},
		"more payload": {framed(append(payloadOf(t, handmade(t)), 0)), "1 bytes too many"},
	} {
		t.Run(name, func(t *testing.T) {
			_, err := ReadSnapshot(bytes.NewReader(c.b))
			if !errors.Is(err, ErrSnapshot) || !strings.Contains(err.Error(), c.says) {
				t.Errorf("%v; wanted it to say %q", err, c.says)
			}
		})
	}
}

func TestAnyCutAndAnyChangedByteIsNoticed(t *testing.T) {
	whole := saved(t, handmade(t))
	for n := range whole {
		if _, err := ReadSnapshot(bytes.NewReader(whole[:n])); !errors.Is(err, ErrSnapshot) {
			t.Fatalf("cut after %d bytes: %v", n, err)
		}
		b := bytes.Clone(whole)
		b[n] ^= 0x41
		if _, err := ReadSnapshot(bytes.NewReader(b)); !errors.Is(err, ErrSnapshot) {
			t.Fatalf("byte %d changed: %v", n, err)
		}
	}
}

func TestReadSnapshotReadsNoFurther(t *testing.T) {
	one := saved(t, handmade(t))
	r := iotest.OneByteReader(bytes.NewReader(append(bytes.Clone(one), one...)))
	for range 2 {
		if _, err := ReadSnapshot(r); err != nil {
			t.Fatal(err)
		}
	}
	if _, err := r.Read(make([]byte, 1)); err != io.EOF {
		t.Errorf("after two snapshots: %v", err)
	}
}

func TestReadSnapshotPassesTheReadersErrorOn(t *testing.T) {
	broken := errors.New("disk gone")
	r := io.MultiReader(bytes.NewReader(saved(t, handmade(t))[:100]), iotest.ErrReader(broken))
	if _, err := ReadSnapshot(r); !errors.Is(err, broken) || errors.Is(err, ErrSnapshot) {
		t.Error(err)
	}
}

// A list that claims more entries than there are bytes for must not be believed, whatever the checksum says.
func TestMemoryIsBoundedByTheBytesThatAreThere(t *testing.T) {
	payload := payloadOf(t, handmade(t))
	var before, after runtime.MemStats
	runtime.ReadMemStats(&before)
	tries := 0
	for at := 0; at+4 <= len(payload); at += 3 {
		for _, n := range []uint32{math.MaxUint32, math.MaxInt32, 1 << 24} {
			b := bytes.Clone(payload)
			binary.LittleEndian.PutUint32(b[at:], n)
			tryPayload(t, b)
			tries++
		}
	}
	runtime.ReadMemStats(&after)
	if per := (after.TotalAlloc - before.TotalAlloc) / uint64(tries); per > 4<<20 {
		t.Errorf("%d bytes taken for each of %d payloads of %d bytes", per, tries, len(payload))
	}
}

func TestDamagedPayloadsNeverPanic(t *testing.T) {
	payload := payloadOf(t, handmade(t))
	rng := rand.New(rand.NewPCG(1, 2))
	usable := 0
	for range 3000 {
		b := bytes.Clone(payload)
		for range 1 + rng.IntN(3) {
			b[rng.IntN(len(b))] = byte(rng.Uint32() >> rng.IntN(24))
		}
		if tryPayload(t, b) {
			usable++
		}
	}
	if usable == 0 || usable == 3000 {
		t.Errorf("%d of 3000 damaged payloads could be used", usable)
	}
}

// tryPayload loads a payload and, if that works, scores with it and saves it again; it tells whether it worked.
func tryPayload(t testing.TB, payload []byte) bool {
	t.Helper()
	b := framed(payload)
	s, err := ReadSnapshot(bytes.NewReader(b))
	if err != nil {
		if !errors.Is(err, ErrSnapshot) {
			t.Fatalf("%v does not wrap ErrSnapshot", err)
		}
		return false
	}
	if !bytes.Equal(saved(t, s), b) {
		t.Fatal("saved anew, the bytes differ")
	}
	table := s.tableFor()
	for i, v := range scores(t, s, table) {
		if v.Implied < -1 || int(v.Implied) >= len(s.facts.Classes) {
			t.Fatalf("row %d: %+v", i, v)
		}
	}
	return true
}

// tableFor is a table with the columns, classes and sources that s knows, and odd values.
func (s *Snapshot) tableFor() *Table {
	t := &Table{Classes: s.facts.Classes, SourceNames: s.facts.Sources}
	odd := []float64{0, nan, 1, -math.MaxFloat64, math.MaxFloat64, 150, math.SmallestNonzeroFloat64}
	const n = 9
	for i := range n {
		t.Labels = append(t.Labels, int32(i%len(t.Classes)))
		t.Sources = append(t.Sources, int32(i%(len(t.SourceNames)+1))-1)
	}
	for k, f := range s.fields {
		c := Column{Name: f.Name, Kind: f.Kind, Size: f.Size, Levels: append([]string{"unheard of"}, s.encoder.Parts[k].Levels...)}
		for i := range n {
			c.Codes = append(c.Codes, int32((i+k)%(len(c.Levels)+1))-1)
			for j := range f.Size {
				c.Values = append(c.Values, odd[(i+j+k)%len(odd)])
			}
		}
		t.Columns = append(t.Columns, c)
	}
	return t
}

func FuzzReadSnapshot(f *testing.F) {
	payload := payloadOf(f, handmade(f))
	f.Add(payload)
	f.Add(payload[:len(payload)/2])
	f.Fuzz(func(t *testing.T, b []byte) {
		tryPayload(t, b)
		if _, err := ReadSnapshot(bytes.NewReader(b)); err != nil && !errors.Is(err, ErrSnapshot) {
			t.Fatal(err) // bytes without head and checksum
		}
	})
}
