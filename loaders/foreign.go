package loaders

import (
	"bytes"
	"io"

	"wavetally/harmonics/wave"
)

// foreign are the first bytes of files that are taken for recordings now and then, and what to do about each.
var foreign = []struct{ mark, what string }{
	{"\xD0\xCF\x11\xE0\xA1\xB1\x1A\xE1", "it is a spreadsheet or document of the old kind (.xls, .doc), or protected by a password; save the table as XLSX or CSV without one"},
	{"%PDF-", "it is a PDF; export the waveforms themselves as COMTRADE, WAV, CSV or XLSX"},
	{"\x89PNG", "it is a picture; export the waveforms themselves as COMTRADE, WAV, CSV or XLSX"},
	{"\xFF\xD8\xFF", "it is a picture; export the waveforms themselves as COMTRADE, WAV, CSV or XLSX"},
	{"BM\x00", "it is a picture; export the waveforms themselves as COMTRADE, WAV, CSV or XLSX"},
	{"7z\xBC\xAF\x27\x1C", "it is an archive that is not read in place; unpack it and name the recordings"},
	{"Rar!\x1A", "it is an archive that is not read in place; unpack it and name the recordings"},
	{"BZh", "it is an archive that is not read in place; unpack it and name the recordings"},
	{"\xFD7zXZ\x00", "it is an archive that is not read in place; unpack it and name the recordings"},
	{"\x28\xB5\x2F\xFD", "it is an archive that is not read in place; unpack it and name the recordings"},
	{"\x89HDF\r\n\x1A\n", "it is an HDF5 file; export the waveforms as COMTRADE, WAV, CSV or XLSX"},
	{"PAR1", "it is a Parquet file; export the waveforms as COMTRADE, WAV, CSV or XLSX"},
	{"<!DOCTYPE html", "it is a web page; save the table as CSV"},
	{"<!doctype html", "it is a web page; save the table as CSV"},
	{"<html", "it is a web page; save the table as CSV"},
	{"<?xml", "it is an XML file; export the waveforms as COMTRADE, WAV, CSV or XLSX"},
	{"{\n", "it is a JSON file; export the waveforms as COMTRADE, WAV, CSV or XLSX"},
	{"{\"", "it is a JSON file; export the waveforms as COMTRADE, WAV, CSV or XLSX"},
}

// foreign recognises a file that is something else altogether, to say so in plain words.
func (it item) foreign() error {
	f, err := it.opt.Open(it.path)
	if err != nil {
		return nil // reported by whoever opens it next
	}
	defer f.Close()
	var head [64]byte
	n, _ := io.ReadFull(f, head[:])
	for _, k := range foreign {
		if bytes.HasPrefix(head[:n], []byte(k.mark)) {
			return &wave.NotThisFormatError{File: it.name, Format: "a recording that can be read", Msg: k.what}
		}
	}
	return nil
}
