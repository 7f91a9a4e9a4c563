package event

import (
	"fmt"
	"strings"
)

// lineIndex maps dotted keys to the lines of a TOML file on which they are set,
// for messages. The decoder of the TOML library keeps no positions, so this
// reads the file once more, knowing no more of the syntax than headers, keys,
// strings and brackets; a key that it does not find is reported without a line.
type lineIndex map[string]int

func newLineIndex(text string) lineIndex {
	index := lineIndex{}
	counts := map[string]int{}
	prefix := ""
	depth := 0    // of open brackets of a value that spans lines
	closing := "" // of an open multi-line string
	for number, line := range strings.Split(text, "\n") {
		number++
		if closing != "" {
			_, rest, closed := strings.Cut(line, closing)
			if !closed {
				continue
			}
			closing = ""
			depth += bracketBalance(rest, &closing)
			continue
		}
		trimmed := strings.TrimSpace(line)
		if depth > 0 {
			depth += bracketBalance(trimmed, &closing)
			continue
		}
		switch {
		case trimmed == "" || trimmed[0] == '#':
		case strings.HasPrefix(trimmed, "[["):
			parts, _, _ := cutKey(trimmed[2:], ']')
			name := resolve(parts, counts)
			prefix = fmt.Sprintf("%s[%d].", name, counts[name])
			counts[name]++
			index[strings.TrimSuffix(prefix, ".")] = number
		case trimmed[0] == '[':
			parts, _, _ := cutKey(trimmed[1:], ']')
			name := resolve(parts, counts)
			prefix = name + "."
			index[name] = number
		default:
			parts, value, found := cutKey(trimmed, '=')
			if !found {
				continue
			}
			index[prefix+strings.Join(parts, ".")] = number
			depth = bracketBalance(value, &closing)
		}
	}
	return index
}

// resolve joins a header's parts. After [[site]], [site.noise] belongs to the
// last site: site[1].noise.
func resolve(parts []string, counts map[string]int) string {
	name := ""
	for i, p := range parts {
		if i > 0 {
			if n := counts[name]; n > 0 {
				name = fmt.Sprintf("%s[%d]", name, n-1)
			}
			name += "."
		}
		name += p
	}
	return name
}

// line returns the line of key or of the nearest table around it, 0 if none.
func (x lineIndex) line(key string) int {
	for key != "" {
		if n, ok := x[key]; ok {
			return n
		}
		cut := strings.LastIndexAny(key, ".[")
		if cut < 0 {
			return 0
		}
		key = key[:cut]
	}
	return 0
}

// cutKey splits a dotted key, whose parts may be quoted, off the text before the
// first end outside quotes.
func cutKey(text string, end byte) (parts []string, rest string, found bool) {
	part := ""
	for i := 0; i < len(text); i++ {
		switch c := text[i]; c {
		case end:
			return append(parts, part), text[i+1:], true
		case '.':
			parts, part = append(parts, part), ""
		case ' ', '\t':
		case '"', '\'':
			length := quoted(text[i:])
			part += text[i+1 : max(i+1, i+length-1)]
			i += length - 1
		default:
			part += text[i : i+1]
		}
	}
	return append(parts, part), "", false
}

// quoted is the length of the quoted string that text begins with, or of the whole
// text if nothing closes it.
func quoted(text string) int {
	for i := 1; i < len(text); i++ {
		switch {
		case text[i] == text[0]:
			return i + 1
		case text[i] == '\\' && text[0] == '"':
			i++
		}
	}
	return len(text)
}

// bracketBalance counts opening less closing brackets outside strings and
// comments; closing is set when a multi-line string stays open.
func bracketBalance(value string, closing *string) int {
	depth := 0
	for i := 0; i < len(value); i++ {
		switch c := value[i]; c {
		case '#':
			return depth
		case '[', '{':
			depth++
		case ']', '}':
			depth--
		case '"', '\'':
			if triple := strings.Repeat(string(c), 3); strings.HasPrefix(value[i:], triple) {
				end := strings.Index(value[i+3:], triple)
				if end < 0 {
					*closing = triple
					return depth
				}
				i += 3 + end + 2
				continue
			}
			i += quoted(value[i:]) - 1
		}
	}
	return depth
}
