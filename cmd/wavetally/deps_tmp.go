//go:build ignore_deps

package main

import (
	_ "codeberg.org/go-fonts/liberation/liberationsansregular"
	_ "github.com/BurntSushi/toml"
	_ "github.com/google/go-cmp/cmp"
	_ "github.com/jung-kurt/gofpdf"
	_ "github.com/klauspost/compress/gzip"
	_ "github.com/rogpeppe/go-internal/testscript"
	_ "github.com/schollz/progressbar/v3"
	_ "github.com/spf13/cobra"
	_ "github.com/xuri/excelize/v2"
	_ "golang.org/x/term"
	_ "golang.org/x/text/encoding/charmap"
	_ "gonum.org/v1/gonum/dsp/fourier"
	_ "gonum.org/v1/plot/vg/draw"
	_ "modernc.org/sqlite"
)
