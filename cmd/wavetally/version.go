package main

import "runtime/debug"

// release is the version of the program; builds from a work tree add the commit.
const release = "0.1.0"

// version returns the release and, where the build knows it, the commit that it was built from.
func version() string {
	info, ok := debug.ReadBuildInfo()
	if !ok {
		return release
	}
	settings := map[string]string{}
	for _, s := range info.Settings {
		settings[s.Key] = s.Value
	}
	commit := settings["vcs.revision"]
	if len(commit) < 12 {
		return release
	}
	v := release + "+" + commit[:12]
	if settings["vcs.modified"] == "true" {
		v += ".changed"
	}
	return v
}
