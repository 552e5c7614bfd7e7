package batch

import (
	"bytes"
	"os"
	"path/filepath"
	"reflect"
	"testing"
)

// FuzzRecord: whatever stands in a record's file, it is refused, or its entries come
// back from a record that is made of them, whose last line may be torn anywhere.
func FuzzRecord(f *testing.F) {
	f.Add([]byte(""), uint16(0))
	f.Add([]byte("{}\n"), uint16(1))
	f.Add([]byte(`{"schema":"fettle.treatment/1","status":"done","output":"a.wav","warnings":["x"],"peak_in_dbfs":-3.5,"trial_from":null}`+"\n"), uint16(9))
	f.Add([]byte(`{"schema":"fettle.treatment/1","output":"\u0000e9.wav","treated":"2026-12-01T12:00:00Z"}`+"\n"+`{"schema":"fettle.treatment/1","output":"b`), uint16(40))
	f.Add([]byte(`{"schema":"fettle.treatment/1","output":"\u0000"}`+"\n"), uint16(0))
	f.Add([]byte("null\n[]\n1\n\n"), uint16(0))
	f.Fuzz(func(t *testing.T, content []byte, tear uint16) {
		path := filepath.Join(t.TempDir(), RecordName)
		mustDo(t, os.WriteFile(path, content, 0o666))
		entries, err := readEntries(path)
		if err != nil {
			return
		}
		whole := content[:bytes.LastIndexByte(content, '\n')+1]
		if n := bytes.Count(whole, []byte("\n")); n != len(entries) {
			t.Errorf("%d entries of %d lines", len(entries), n)
		}
		lines, err := encode(entries)
		mustDo(t, err)
		if tear := int(tear); len(entries) > 0 && tear > 0 {
			lines = append(lines, lines[:min(tear, bytes.IndexByte(lines, '\n'))]...)
		}
		mustDo(t, os.WriteFile(path, lines, 0o666))
		rec, err := openRecord(path) // drops the torn line
		mustDo(t, err, rec.append(entries...), rec.close())
		again, err := readEntries(path)
		if err != nil || !reflect.DeepEqual(again, append(entries, entries...)) {
			t.Errorf("%+v became %+v, %v", entries, again, err)
		}
	})
}

// FuzzReadList: a list is refused, or names both for every line.
func FuzzReadList(f *testing.F) {
	for _, text := range []string{"", "\ufeff", "recording,chain\na.wav,b.yaml\n", "\ufeff\"chain\",x,\"Recording\"\r\n\"a\"\"b\",,c\r\n", "recording,chain\n\n a , b \n", "chain,recording\na\n", "recording,chain\n\"a\nb\",c"} {
		f.Add([]byte(text))
	}
	f.Fuzz(func(t *testing.T, content []byte) {
		path := filepath.Join(t.TempDir(), "list.csv")
		mustDo(t, os.WriteFile(path, content, 0o666))
		listed, err := ReadList(path)
		if err != nil {
			return
		}
		for _, l := range listed {
			if l.Recording == "" || l.Chain == "" || l.Line < 2 || !filepath.IsAbs(l.Recording) || !filepath.IsAbs(l.Chain) {
				t.Errorf("%+v of %q", l, content)
			}
		}
		for i, in := range inputs(path, listed) {
			if in.Path != listed[i].Recording || !filepath.IsLocal(in.Rel) && filepath.Base(in.Path) != in.Rel {
				t.Errorf("%+v of %+v", in, listed[i])
			}
		}
	})
}
