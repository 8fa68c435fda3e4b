package site_test

import (
	"fmt"

	"heatreeve/agent/site"
)

func ExampleParse() {
	_, err := site.Parse("creamery.yaml", []byte(`site: Brackwater Creamery
timezone: Europe/Dublin
broker: {url: mqtt://127.0.0.1}
tags:
  TT-201: {topic: hw/TT-201, unit: °C, accuracy: IEC 60751 A}
  FT-201: {topic: hw/FT-201, unit: m3/h, accuracy: "0,5 % of reading"}
loads:
  hot-water:
    stream: {fluid: water, flow: FT-201, inlet: TT-20, outlet: 60 °C, pressure: 4 bar, meter_at: inlet, gives: heat}
`))
	fmt.Println(err)
	// Output:
	// creamery.yaml:6:52: tags.FT-201.accuracy: "0,5 %": the decimal separator must be a point, and thousands are parted by a space; allowed here: ratio (%, ‰, ppm, kg/kg, g/kg)
	// creamery.yaml:9:49: loads.hot-water.stream.inlet: tag "TT-20" is not declared; near: "TT-201"; declared: "TT-201"
}
