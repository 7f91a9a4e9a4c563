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
			if strings.Contains(line, closing) {
				closing = ""
			}
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
			name, _, _ := strings.Cut(trimmed[2:], "]]")
			name = normalKey(name)
			prefix = fmt.Sprintf("%s[%d].", name, counts[name])
			counts[name]++
			index[strings.TrimSuffix(prefix, ".")] = number
		case trimmed[0] == '[':
			name, _, _ := strings.Cut(trimmed[1:], "]")
			name = normalKey(name)
			// [site.noise] after [[site]] belongs to the last site.
			for array, n := range counts {
				if strings.HasPrefix(name, array+".") {
					name = fmt.Sprintf("%s[%d]%s", array, n-1, name[len(array):])
				}
			}
			prefix = name + "."
			index[name] = number
		default:
			key, value, found := strings.Cut(trimmed, "=")
			if !found {
				continue
			}
			index[prefix+normalKey(key)] = number
			depth = bracketBalance(value, &closing)
		}
	}
	return index
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

// normalKey strips spaces and quotes from each part of a dotted key.
func normalKey(key string) string {
	parts := strings.Split(key, ".")
	for i, p := range parts {
		parts[i] = strings.Trim(strings.TrimSpace(p), `"'`)
	}
	return strings.Join(parts, ".")
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
			for i++; i < len(value) && value[i] != c; i++ {
				if value[i] == '\\' && c == '"' {
					i++
				}
			}
		}
	}
	return depth
}
