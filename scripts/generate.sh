#!/bin/sh
# Makes the generated files anew below a folder: scripts/generate.sh GO FOLDER
go=$1
to=$2
set -e
mkdir -p "$to/testdata/heron"
$go run ./cmd/heron-captures testdata -o "$to/testdata/heron"
