package syntax

import (
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"busloom/diag"
)

func TestOwn(t *testing.T) {
	files, _ := filepath.Glob("../../../schemas/*.bus")
	more, _ := filepath.Glob("../../../schemas/*/*.bus")
	m2, _ := filepath.Glob("../../../schemas/*/*/*.bus")
	for _, f := range append(append(files, more...), m2...) {
		text, _ := os.ReadFile(f)
		list := &diag.List{}
		src := diag.NewFile(f, text)
		tree := Parse(src, list)
		fmt.Println(f, len(tree.Decls), list.Len())
		diag.Render(os.Stdout, list.Sorted(), diag.Style{})
	}
}

func TestBad(t *testing.T) {
	text := `busloom 1
network Demo "x
bus chassis 500 kbit/s
ecu Brake on chassis $
mesage Foo 0x100 on chassis, 2 bytes { }
message Speed 0x100 on chassis, 2 bytes {
  from Brake to Cluster
  speed at 0.7..1.0 = raw * * 0.01 km/h
  b at = raw
  c at 1.7..1.0 withn 0..300
  d at 1.7 = raw/48
  q at 1.7 = (raw + 2
  e t 3
  at at 1.3
  select page { when { x at 1.1 } foo }
  f at 3.1 within 0..300 within 2..3
  g at 3.1 checksum crc8 over
  h at 3 = 0x0G
}
states D { 0: a 1 b  2: 3 3: c }
message Unclosed 0x100 on chassis, 2 bytes {
  from Brake to Cluster
ecu X on
`
	list := &diag.List{}
	Parse(diag.NewFile("bad.bus", []byte(text)), list)
	diag.Render(os.Stdout, list.Sorted(), diag.Style{})
}

func TestSpeed(t *testing.T) {
	var b strings.Builder
	b.WriteString("busloom 1\nnetwork X\n")
	for i := range 4000 {
		fmt.Fprintf(&b, "message Msg%d 0x%08X on chassis, 8 bytes \"Some text about it\" {\n  from Brake to Cluster\n  every 10 ms, lost after 50 ms\n", i, i)
		for j := range 8 {
			fmt.Fprintf(&b, "  signal_%d at %d.7..%d.0 = raw * 0.01 km/h  within 0..2.5 km/h  codes Pickup  \"What it is\"\n", j, j, j)
		}
		b.WriteString("}\n")
	}
	s := time.Now()
	list := &diag.List{}
	Parse(diag.NewFile("x", []byte(b.String())), list)
	fmt.Println(b.Len(), time.Since(s), float64(b.Len())/1e6/time.Since(s).Seconds(), "MB/s", list.Len())
}
