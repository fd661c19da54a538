package schema

import (
	"errors"
	"fmt"
	"io/fs"
	"path"
	"slices"
	"strings"

	"busloom/diag"
	"busloom/schema/internal/syntax"
)

// source is one file of the description: a scope of names.
type source struct {
	name string // cleaned path
	tree *syntax.File
	uses []*use
	own  map[symbolKey]*symbol
	// damaged is set if a part of the file couldn't be read.
	damaged bool
	// declares is set if the file, or one it uses, adds something to the
	// network itself (buses, ECUs, messages) rather than to the vocabulary.
	declares bool
	done     bool
}

// use is a file's reference to another one.
type use struct {
	tree   *syntax.Use
	as     string // "" without a prefix
	target *source
	needed bool // some name was found through it
}

// readFiles reads the root and everything it uses.
func (c *compiler) readFiles(root string) {
	name := path.Clean(root)
	text, err := c.files.Read(name)
	if err != nil {
		c.list.Report(diag.ImportUnreadable, diag.Span{}, fmt.Sprintf("%s can't be read: %s", root, plainError(err)), "give the path of a description")
		return
	}
	c.root = c.readSource(name, diag.NewFile(root, text))
	tree := c.root.tree
	c.net.Name = strings.TrimSuffix(path.Base(name), ".bus")
	if tree.Network != nil {
		c.net.Name, c.net.Text = tree.Network.Name.Text, tree.Network.Text.Value
	}
}

func (c *compiler) readSource(name string, file *diag.File) *source {
	s := &source{name: name, own: map[symbolKey]*symbol{}}
	c.sources[name] = s
	problems := &diag.List{}
	s.tree = syntax.Parse(file, problems)
	if s.tree == nil {
		s.tree = &syntax.File{Source: file}
	}
	s.damaged = problems.Failed()
	c.damaged = c.damaged || s.damaged
	c.list.Add(problems)
	c.loading = append(c.loading, s)
	for _, u := range s.tree.Uses {
		c.readUse(s, u)
	}
	c.loading = c.loading[:len(c.loading)-1]
	s.done = true
	for _, d := range s.tree.Decls {
		switch d.(type) {
		case *syntax.BusDecl, *syntax.ECUDecl, *syntax.MessageDecl:
			s.declares = true
		}
	}
	c.order = append(c.order, s)
	return s
}

func (c *compiler) readUse(s *source, tree *syntax.Use) {
	rel := tree.Path.Value
	if problem := badImportPath(rel); problem != "" {
		c.damaged = true
		c.report(diag.ImportNotUnder, tree.Path.Span, problem, "write the path from this file's folder, with forward slashes")
		return
	}
	u := &use{tree: tree}
	if tree.As != nil {
		u.as = tree.As.Text
		for _, other := range s.uses {
			if other.as == u.as {
				c.report(diag.DuplicateName, tree.As.Span, fmt.Sprintf("%s is already the prefix of %q", u.as, other.tree.Path.Value), "choose another prefix").
					Also(other.tree.As.Span, "first used here")
				return
			}
		}
	}
	name := path.Join(path.Dir(s.name), rel)
	target, seen := c.sources[name]
	switch {
	case seen && !target.done:
		ring := []string{name}
		for _, on := range c.loading[slices.Index(c.loading, target)+1:] {
			ring = append(ring, on.name)
		}
		c.report(diag.ImportCycle, tree.Path.Span, fmt.Sprintf("the files use each other in a ring: %s uses %s", strings.Join(ring, " uses "), name),
			"move what both need into a file of its own")
		// What the ring hides isn't unknown.
		c.damaged = true
		return
	case !seen:
		text, err := c.files.Read(name)
		if err != nil {
			c.report(diag.ImportUnreadable, tree.Path.Span, fmt.Sprintf("%s can't be read: %s", name, plainError(err)), "correct the path, which starts at this file's folder")
			c.damaged = true
			return
		}
		target = c.readSource(name, diag.NewFile(name, text))
	}
	for _, other := range s.uses {
		if other.target == target {
			c.report(diag.DuplicateName, tree.Path.Span, fmt.Sprintf("%q is used twice", rel), "remove one of the two lines").
				Also(other.tree.Path.Span, "first used here")
			return
		}
	}
	u.target = target
	s.declares = s.declares || target.declares
	s.uses = append(s.uses, u)
}

// badImportPath says why a path can't be used, "" if it can.
func badImportPath(p string) string {
	switch {
	case p == "":
		return "the path is empty"
	case strings.Contains(p, "\\"):
		return fmt.Sprintf("the path %q has a backslash", p)
	case strings.HasPrefix(p, "/") || (len(p) > 1 && p[1] == ':'):
		return fmt.Sprintf("the path %q is absolute, so it holds on one machine only", p)
	case strings.ContainsFunc(p, func(r rune) bool { return r < ' ' || r == 0x7f }):
		return fmt.Sprintf("the path %q has a control character", p)
	}
	return ""
}

// plainError is an error without the path, which the caller names itself.
func plainError(err error) string {
	if errors.Is(err, fs.ErrNotExist) {
		return "there is no such file"
	}
	var p *fs.PathError
	if errors.As(err, &p) {
		return p.Err.Error()
	}
	return err.Error()
}
