package event

import (
	"fmt"
	"math"
	"slices"
	"sort"
	"strings"
	"time"
)

// table reads one TOML table key by key and remembers which keys were asked
// for. The first fault is kept; later reads return zero values, so that a
// decoder reads straight on and asks once at the end.
type table struct {
	d      *decoder
	path   string // "" at the top, else dotted without a trailing dot
	values map[string]any
	known  []string
	// missing is the complaint about a key of this table that is not there.
	missing *InputError
}

// decoder is one file being read.
type decoder struct {
	file  string
	lines lineIndex
	err   *InputError
}

func (d *decoder) fail(key, got, want string) {
	if d.err == nil {
		d.err = &InputError{File: d.file, Line: d.lines.line(key), Key: key, Got: got, Want: want}
	}
}

func (t *table) key(name string) string {
	if t.path == "" {
		return name
	}
	return t.path + "." + name
}

func (t *table) fail(name, want string) {
	v, ok := t.values[name]
	if ok {
		t.d.fail(t.key(name), show(v), want)
		return
	}
	if t.d.err == nil {
		t.d.fail(t.key(name), "nothing", want)
		t.missing = t.d.err
	}
}

// take marks a key as known and returns its value.
func (t *table) take(name string) (any, bool) {
	t.known = append(t.known, name)
	v, ok := t.values[name]
	return v, ok
}

func (t *table) has(name string) bool {
	_, ok := t.values[name]
	return ok
}

// finish reports a key that nothing asked for.
func (t *table) finish() {
	unknown := []string{}
	for name := range t.values {
		if !slices.Contains(t.known, name) {
			unknown = append(unknown, name)
		}
	}
	if len(unknown) == 0 {
		return
	}
	// The one that stands first in the file.
	sort.Slice(unknown, func(i, j int) bool {
		a, b := t.d.lines.line(t.key(unknown[i])), t.d.lines.line(t.key(unknown[j]))
		return a < b || a == b && unknown[i] < unknown[j]
	})
	if t.missing != nil && t.missing == t.d.err {
		// It may be there under a misspelt name.
		t.d.err = nil
	}
	sort.Strings(t.known)
	t.d.fail(t.key(unknown[0]), show(t.values[unknown[0]]), "a known key: one of "+strings.Join(slices.Compact(t.known), ", "))
}

// number is any finite TOML number; want says what, for the message.
func (t *table) number(name, want string, ok func(float64) bool) float64 {
	v, found := t.take(name)
	if !found {
		t.fail(name, want)
		return 0
	}
	x, is := asNumber(v)
	if !is || ok != nil && !ok(x) {
		t.fail(name, want)
		return 0
	}
	return x
}

func (t *table) numberOr(name string, fallback float64, want string, ok func(float64) bool) float64 {
	if !t.has(name) {
		t.known = append(t.known, name)
		return fallback
	}
	return t.number(name, want, ok)
}

func (t *table) integerOr(name string, fallback int64, want string, ok func(int64) bool) int64 {
	v, found := t.take(name)
	if !found {
		return fallback
	}
	x, is := v.(int64)
	if !is || ok != nil && !ok(x) {
		t.fail(name, want)
		return 0
	}
	return x
}

func (t *table) text(name, want string) string {
	v, _ := t.take(name)
	s, is := v.(string)
	if !is || strings.TrimSpace(s) == "" {
		t.fail(name, want)
		return ""
	}
	return s
}

func (t *table) textOr(name, fallback, want string) string {
	if !t.has(name) {
		t.known = append(t.known, name)
		return fallback
	}
	return t.text(name, want)
}

// choice is a text out of a list.
func (t *table) choiceOr(name, fallback string, choices []string) string {
	want := `one of "` + strings.Join(choices, `", "`) + `"`
	s := t.textOr(name, fallback, want)
	if t.d.err == nil && !slices.Contains(choices, s) {
		t.fail(name, want)
	}
	return s
}

func (t *table) texts(name, want string) []string {
	v, _ := t.take(name)
	list, is := v.([]any)
	if !is || len(list) == 0 {
		t.fail(name, want)
		return nil
	}
	out := make([]string, len(list))
	for i, e := range list {
		s, is := e.(string)
		if !is {
			t.fail(name, want)
			return nil
		}
		out[i] = s
	}
	return out
}

func (t *table) flagOr(name string, fallback bool) bool {
	v, found := t.take(name)
	if !found {
		return fallback
	}
	b, is := v.(bool)
	if !is {
		t.fail(name, "true or false")
	}
	return b
}

// sub returns the table under name; an empty one after a fault.
func (t *table) sub(name, want string) *table {
	v, _ := t.take(name)
	m, is := v.(map[string]any)
	if !is {
		t.fail(name, want)
	}
	return &table{d: t.d, path: t.key(name), values: m}
}

// subs returns the tables of an array of tables.
func (t *table) subs(name, want string) []*table {
	v, _ := t.take(name)
	var maps []map[string]any
	switch list := v.(type) {
	case []map[string]any:
		maps = list
	case []any:
		// An array of inline tables.
		for _, e := range list {
			m, is := e.(map[string]any)
			if !is {
				t.fail(name, want)
				return nil
			}
			maps = append(maps, m)
		}
	}
	if len(maps) == 0 {
		t.fail(name, want)
	}
	out := make([]*table, len(maps))
	for i, m := range maps {
		out[i] = &table{d: t.d, path: fmt.Sprintf("%s[%d]", t.key(name), i), values: m}
	}
	return out
}

func asNumber(v any) (float64, bool) {
	switch x := v.(type) {
	case int64:
		return float64(x), true
	case float64:
		return x, !math.IsNaN(x) && !math.IsInf(x, 0)
	}
	return 0, false
}

// show writes a value as a message quotes it, cut to a readable length.
func show(v any) string {
	var s string
	switch x := v.(type) {
	case string:
		s = fmt.Sprintf("%q", x)
	case map[string]any, []map[string]any:
		s = "a table"
	case []any:
		parts := make([]string, len(x))
		for i, e := range x {
			parts[i] = show(e)
		}
		s = "[" + strings.Join(parts, ", ") + "]"
	case float64:
		s = strings.ToLower(fmt.Sprint(x)) // nan and inf as TOML has them
	case time.Time:
		s = "the date or time " + x.Format(time.RFC3339)
	default:
		s = fmt.Sprint(x)
	}
	if runes := []rune(s); len(runes) > 80 {
		s = string(runes[:77]) + "..."
	}
	return s
}
