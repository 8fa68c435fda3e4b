package water

import (
	"testing"

	"heatreeve/thermo/fluidtest"
)

func TestConformance(t *testing.T) {
	t.Run("liquid", func(t *testing.T) { fluidtest.Run(t, Liquid()) })
	t.Run("steam", func(t *testing.T) { fluidtest.Run(t, Steam()) })
}
