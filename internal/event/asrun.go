package event

import (
	"fmt"
	"path/filepath"
	"slices"
	"strings"
	"unicode"
)

// SetSeed replaces the event file's seed.
func (c *Config) SetSeed(seed uint64) {
	c.Seed = seed
	c.retire("seed")
	c.header = []string{fmt.Sprintf("seed = %d", seed)}
}

// ReplaceStrain points the site of that code to another strain file, relative to
// the working folder.
func (c *Config) ReplaceStrain(code, file string) error {
	absolute, err := filepath.Abs(file)
	if err != nil {
		return err
	}
	var codes []string
	for i := range c.Sites {
		s := &c.Sites[i]
		codes = append(codes, s.Code)
		if s.Code != code {
			continue
		}
		path := fmt.Sprintf("site[%d]", i)
		if _, known := c.lines[path]; !known {
			return fmt.Errorf("%s lists its sites in one value, want a [[site]] table for each", c.File)
		}
		c.strike(path)
		lines := []string{strainKey + quote(filepath.ToSlash(absolute))}
		c.retire(path + ".strain")
		if s.Synthetic != nil {
			c.retire(path + ".synthetic")
			if s.Noise.From == "curve" {
				// Its curve may be the one that the synthetic strain named.
				c.retire(path + ".noise")
				noise := fmt.Sprintf("noise = { from = \"curve\", curve = %q", s.Noise.Curve)
				if s.Noise.Smooth >= 0 {
					noise += fmt.Sprintf(", smooth = %v", s.Noise.Smooth)
				}
				lines = append(lines, noise+" }")
			}
		}
		c.insert(path, lines)
		s.Strain, s.Synthetic = absolute, nil
		return nil
	}
	return fmt.Errorf("no site %s, want one of %s", code, strings.Join(codes, ", "))
}

// quote writes a TOML basic string.
func quote(s string) string {
	var b strings.Builder
	for _, r := range s {
		switch {
		case r == '"' || r == '\\':
			b.WriteString("\\" + string(r))
		case r < ' ' || r == 0x7f:
			fmt.Fprintf(&b, "\\u%04X", r)
		default:
			b.WriteRune(r)
		}
	}
	return `"` + b.String() + `"`
}

// wasMark begins a line of AsRun that the command line made void.
const wasMark = "# was: "

// retire turns the lines that set a key, or anything below it, into comments.
// Lines keep their numbers.
func (c *Config) retire(key string) {
	starts := map[int]bool{}
	for _, n := range c.lines {
		starts[n] = true
	}
	lines := strings.Split(string(c.Source), "\n")
	for k, n := range c.lines {
		if k != key && !strings.HasPrefix(k, key+".") {
			continue
		}
		// To the line before the next key: a value may span several.
		for first := n; n <= len(lines) && (n == first || !starts[n]); n++ {
			if !strings.HasPrefix(lines[n-1], wasMark) {
				lines[n-1] = wasMark + lines[n-1]
			}
		}
	}
	c.Source = []byte(strings.Join(lines, "\n"))
}

// strainKey begins the line that ReplaceStrain inserts.
const strainKey = "strain = "

// strike takes back a strain line inserted earlier.
func (c *Config) strike(path string) {
	n := c.lines[path]
	c.inserted[n] = slices.DeleteFunc(c.inserted[n], func(line string) bool { return strings.HasPrefix(line, strainKey) })
}

// insert has AsRun write lines below the header of the table at path.
func (c *Config) insert(path string, lines []string) {
	n := c.lines[path]
	c.inserted[n] = append(c.inserted[n], lines...)
}

// AsRun is the event file with what the command line changed.
func (c *Config) AsRun() []byte {
	var b strings.Builder
	file := strings.Map(func(r rune) rune {
		if unicode.IsControl(r) || r == unicode.ReplacementChar {
			return '?'
		}
		return r
	}, c.File)
	fmt.Fprintf(&b, "# As run from %s; relative paths in it start at its folder.\n", file)
	for _, line := range c.header {
		b.WriteString(line + "\n")
	}
	for i, line := range strings.SplitAfter(string(c.Source), "\n") {
		b.WriteString(line)
		if more := c.inserted[i+1]; len(more) > 0 {
			if !strings.HasSuffix(line, "\n") {
				b.WriteString("\n")
			}
			b.WriteString(strings.Join(more, "\n") + "\n")
		}
	}
	return []byte(b.String())
}

// Slug is the title as a folder's name: letters and digits in lower case, what
// is between them as single hyphens.
func (c *Config) Slug() string {
	var b strings.Builder
	gap := false
	for _, r := range strings.ToLower(c.Title) {
		if r > unicode.MaxASCII || !unicode.IsLetter(r) && !unicode.IsDigit(r) {
			gap = true
			continue
		}
		if gap && b.Len() > 0 {
			b.WriteByte('-')
		}
		gap = false
		b.WriteRune(r)
		if b.Len() >= 60 {
			break
		}
	}
	if b.Len() == 0 {
		return "event"
	}
	return b.String()
}
