package event

import (
	"fmt"
	"path/filepath"
	"strings"
	"unicode"
)

// SetSeed replaces the event file's seed.
func (c *Config) SetSeed(seed uint64) {
	c.Seed = seed
	c.replaceLine("seed", fmt.Sprintf("seed = %d", seed))
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
		key := fmt.Sprintf("site[%d].strain", i)
		if s.Synthetic != nil {
			key = fmt.Sprintf("site[%d].synthetic", i)
		}
		s.Strain, s.Synthetic = absolute, nil
		c.replaceLine(key, fmt.Sprintf("strain = %q", filepath.ToSlash(absolute)))
		return nil
	}
	return fmt.Errorf("no site %s, want one of %s", code, strings.Join(codes, ", "))
}

// replaceLine sets a key's line in the source that AsRun gives back; a key that
// is not there goes to the top of AsRun.
func (c *Config) replaceLine(key, line string) {
	lines := strings.Split(string(c.Source), "\n")
	if n, ok := c.lines[key]; ok {
		old := strings.TrimSpace(lines[n-1])
		lines[n-1] = line + "  # was: " + old
	} else {
		c.header = append(c.header, line)
	}
	c.Source = []byte(strings.Join(lines, "\n"))
}

// AsRun is the event file with what the command line changed.
func (c *Config) AsRun() []byte {
	var b strings.Builder
	fmt.Fprintf(&b, "# As run from %s; relative paths in it start at its folder.\n", c.File)
	for _, line := range c.header {
		b.WriteString(line + "\n")
	}
	b.Write(c.Source)
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
