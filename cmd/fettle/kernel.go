package main

import (
	"fmt"

	"fettle/filter/stream/machine"

	"github.com/urfave/cli/v2"
)

// kernelVariable names the kernel where the flag does not.
const kernelVariable = "FETTLE_KERNEL"

func kernelFlag() cli.Flag {
	return &cli.StringFlag{
		Name:    "kernel",
		EnvVars: []string{kernelVariable},
		Usage:   "use `KERNEL`: portable, avx2 or avx512",
	}
}

// kernelOf gives the kernel asked for, or else the best that runs here.
func kernelOf(c *cli.Context) (k machine.Kernel, given bool, err error) {
	name := c.String("kernel")
	if name == "" {
		return machine.Best(), false, nil
	}
	if k, err = machine.Parse(name); err != nil {
		return 0, false, fmt.Errorf("--kernel: %w", err)
	}
	return k, true, nil
}
