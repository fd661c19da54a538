package explain

import (
	"embed"
	"fmt"
	"regexp"
	"strings"

	"busloom/diag"
)

//go:embed pages/*.md
var pages embed.FS

// Page returns the page of a code, as Markdown.
func Page(code diag.Code) (string, bool) {
	b, err := pages.ReadFile("pages/" + strings.ToUpper(string(code)) + ".md")
	return string(b), err == nil
}

// Example is one of a page's examples: one or more files, the first being the
// one to compile.
type Example struct {
	Wrong bool
	Files []File
}

// File is a file of an example. Names end in .bus for descriptions and in
// .json for databases.
type File struct {
	Name string
	Text string
}

var fence = regexp.MustCompile("(?ms)^```(\\w+) (wrong|right)(?: ([\\w./-]+))?\n(.*?)^```$")

// Examples takes the examples out of a page. Fences read
//
//	```bus wrong            (or right)
//	```bus wrong wheels.bus (a further file of that example)
//	```json wrong           (a database)
func Examples(page string) (wrong, right Example, err error) {
	wrong.Wrong = true
	for _, m := range fence.FindAllStringSubmatch(page, -1) {
		e := &right
		if m[2] == "wrong" {
			e = &wrong
		}
		name := m[3]
		if name == "" {
			name = "example." + m[1]
		}
		e.Files = append(e.Files, File{name, m[4]})
	}
	if len(wrong.Files) == 0 || len(right.Files) == 0 {
		return wrong, right, fmt.Errorf("a page needs a wrong and a right example")
	}
	return wrong, right, nil
}
