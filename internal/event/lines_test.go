package event

import (
	"strings"
	"testing"
)

func TestLineIndex(t *testing.T) {
	text := `# [no] header = here
top = 1
"quoted key" = 2        # "quoted key"
'with = sign' = 3
dotted.key . inner = 4
inline = { a = 1, b = { c = 2 } }
list = [
  "a ] b", # ] not the end
  [1, 2],
  { x = 1, y = "=" },
]
after = 5
text = """
fake = 1
[fake]
"""
raw = '''
"""
fake = 2
''' # over
nested = [ """
]""", 1 ]
last = 'it''s' 
escaped = "\" [ # "
behind = 6

[table]
key = 1
[ table . "sub" ]  # [other]
key = 2

[[site]]
code = "A1"
[site.noise]
from = "data"
[[site]]
code = "B1"
noise.from = "data"
[site.noise.deep]
x = 1
[[site.part]]
y = 1
[[site.part]]
y = 2
[end]
key=3
`
	text = strings.Replace(text, "last = 'it''s' \n", "last = 'its'\n", 1)
	for _, ending := range []string{"\n", "\r\n"} {
		index := newLineIndex(strings.ReplaceAll(text, "\n", ending))
		for _, tc := range []struct {
			key  string
			want int
		}{
			{"top", 2}, {"quoted key", 3}, {"with = sign", 4}, {"dotted.key.inner", 5},
			{"inline", 6}, {"inline.b.c", 6}, {"list", 7}, {"list[2].y", 7}, {"after", 12},
			{"text", 13}, {"raw", 17}, {"nested", 21}, {"last", 23}, {"escaped", 24}, {"behind", 25},
			{"table", 27}, {"table.key", 28}, {"table.sub", 29}, {"table.sub.key", 30}, {"table.missing", 27},
			{"site[0]", 32}, {"site[0].code", 33}, {"site[0].noise", 34}, {"site[0].noise.from", 35}, {"site[0].missing", 32},
			{"site[1]", 36}, {"site[1].code", 37}, {"site[1].noise.from", 38}, {"site[1].noise.deep.x", 40},
			{"site[1].part[0].y", 42}, {"site[1].part[1].y", 44}, {"end.key", 46},
			{"fake", 0}, {"no", 0}, {"x", 0}, {"missing", 0}, {"", 0},
		} {
			if got := index.line(tc.key); got != tc.want {
				t.Errorf("with %q: line of %q = %d, want %d", ending, tc.key, got, tc.want)
			}
		}
	}
}

// Sites as a list of inline tables: the list's own line is the nearest known.
func TestLineIndexInlineList(t *testing.T) {
	index := newLineIndex("\nsite = [\n { code = \"A1\" },\n { code = \"B1\" },\n]\n[event]\ntime = 1\n")
	if got := index.line("site[1].code"); got != 2 {
		t.Errorf("line of site[1].code = %d, want 2", got)
	}
	if got := index.line("event.time"); got != 7 {
		t.Errorf("line of event.time = %d, want 7", got)
	}
}

func TestCutKeyUnclosed(t *testing.T) {
	for _, text := range []string{`"`, `'`, `"a`, `"a\`, `a.`, ``} {
		if _, _, found := cutKey(text, '='); found {
			t.Errorf("cutKey(%q) found an end", text)
		}
	}
}
