package deps_tmp

import (
	_ "github.com/alecthomas/participle/v2"
	_ "github.com/klauspost/compress/gzip"
	_ "github.com/rogpeppe/go-internal/testscript"
	_ "github.com/santhosh-tekuri/jsonschema/v6"
	_ "github.com/spf13/cobra"
	_ "github.com/stretchr/testify/require"
	_ "go.einride.tech/can"
	_ "go.einride.tech/can/pkg/socketcan"
	_ "golang.org/x/term"
	_ "pgregory.net/rapid"
)
