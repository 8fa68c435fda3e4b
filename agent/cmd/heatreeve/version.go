package main

import (
	"context"
	"fmt"
	"runtime"
	"runtime/debug"
)

// version is set by the linker: -X main.version=1.2.3.
var version = "development"

func runVersion(_ context.Context, c *call) error {
	if err := c.parse(0, ""); err != nil {
		return err
	}
	fmt.Fprintf(c.stdout, "heatreeve %s, %s, %s/%s%s\n", version, runtime.Version(), runtime.GOOS, runtime.GOARCH, revision())
	return nil
}

func revision() string {
	info, _ := debug.ReadBuildInfo()
	if info == nil {
		return ""
	}
	for _, s := range info.Settings {
		if s.Key == "vcs.revision" {
			return ", revision " + s.Value
		}
	}
	return ""
}
