package agent

import (
	"fmt"
	"math"
	"strings"
	"testing"
	"time"

	"heatreeve/agent/loads"
	"heatreeve/agent/site"
	"heatreeve/configs"
	"heatreeve/ingest"
)

// maltings plays Ostrel Maltings: what its instruments would publish goes through the
// decoder and the accounts, a second at a time.
type maltings struct {
	*testing.T
	site    *site.Site
	decoder *ingest.Decoder
	books   *accounts
	elapsed int // s
	minutes []loads.Minute
}

func newMaltings(t *testing.T) *maltings {
	t.Helper()
	text, err := configs.Files.ReadFile("ostrel-maltings.yaml")
	if err != nil {
		t.Fatal(err)
	}
	s := parsed(t, string(text))
	d, err := ingest.NewDecoder(signalsOf(s), s.Timing.Ahead)
	if err != nil {
		t.Fatal(err)
	}
	books, err := newAccounts(plantOf(s), designOf(s), s.Digest, s.Zone)
	if err != nil {
		t.Fatal(err)
	}
	return &maltings{T: t, site: s, decoder: d, books: books}
}

func (m *maltings) now() int64 { return clock.UnixNano() + int64(m.elapsed)*sec }

// message is what one topic says; an empty payload is none.
type message struct{ topic, payload string }

// stamped is a value with the time of now, as the plant's controllers write it.
func (m *maltings) stamped(topic string, value float64) message {
	return message{topic, fmt.Sprintf(`{"v":%.6f,"ts":%d}`, value, m.now()/1e6)}
}

// run plays until the plant has run for so long.
func (m *maltings) run(until time.Duration) {
	m.Helper()
	for ; m.elapsed <= int(until/time.Second); m.elapsed++ {
		var readings []loads.Reading
		for _, x := range m.says() {
			if x.payload == "" {
				continue
			}
			out, known := m.decoder.Decode("ostrel/"+x.topic, []byte(x.payload), m.now(), false, nil)
			if !known {
				m.Fatalf("no tag reads %q", x.topic)
			}
			for _, o := range out {
				if o.Refusal != nil {
					m.Fatalf("after %d s: %v", m.elapsed, o.Refusal)
				}
				readings = append(readings, loads.Reading{Tag: o.Tag, At: o.At, Value: o.Value})
			}
		}
		m.minutes = append(m.minutes, m.books.advance(loads.Beat{Readings: readings, Through: m.now()})...)
	}
}

// What the plant does: flows, and temperatures that stand still or rise steadily.
const (
	washFlow   = 0.0018     // m³/s
	washStart  = 99_999.0   // m³, on its counter; it comes round after 555 s
	washHeat   = 102_996130 // J from each m³: ρ(60 °C)·(h(85 °C) − h(60 °C)) at 400.6 kPa by python-iapws (IF97)
	coldPulses = 0.5        // a second, of 10 L each
	coldStart  = 65_000     // pulses; the register comes round after 1072 s
	coldMoves  = 900        // s, when the glycol comes in at −4 °C in the place of −5 °C
	lost       = 600        // s, when the brew house's return is lost for five minutes
	kettleRise = 0.5 / 60   // K/s
	bufferRise = 0.4 / 60
	stonesFall = 0.2 / 60
)

func (m *maltings) says() []message {
	s := float64(m.elapsed)
	every := func(n int, x ...message) []message {
		if m.elapsed%n != 0 {
			return nil
		}
		return x
	}
	all := every(5,
		m.stamped("brew/supply", 95), m.stamped("brew/flow", 25), m.stamped("brew/pump", 2.2),
		m.stamped("wash/supply", 85), m.stamped("wash/return", 60),
		m.stamped("yeast/out", 1), m.stamped("yeast/flow", 3.24),
		m.stamped("kettle/temperature", 60+kettleRise*s), m.stamped("kettle/level", 60),
		m.stamped("buffer/temperature", 20+bufferRise*s),
		m.stamped("malt/in", 20), m.stamped("malt/out", 85), m.stamped("malt/feed", 7.5),
		m.stamped("stones/temperature", 80-stonesFall*s))
	if m.elapsed < lost || m.elapsed >= lost+300 {
		all = append(all, every(5, m.stamped("brew/return", 65))...)
	}
	total := math.Mod(math.Round((washStart+washFlow*s)*100)/100, 100_000)
	heat := func(s float64) float64 { return math.Floor(1.02 * washFlow * s * washHeat / 3.6e6) } // pulses of a meter that shows 2 % more
	all = append(all, every(30, m.stamped("wash/total", total), m.stamped("wash/heat", heat(s)-heat(max(0, s-30))),
		m.stamped("cold/pulses", math.Mod(coldStart+math.Floor(coldPulses*s), 65_536)))...)
	return append(all, m.changes()...)
}

// changes are what is told only when it changes, and the signs of life.
func (m *maltings) changes() []message {
	var all []message
	if m.elapsed%10 == 0 && m.elapsed <= 1800 {
		all = append(all, message{"cold/beat", fmt.Sprintf(`{"ts":%d}`, m.now()/1e6)})
	}
	state := func(word string) message {
		return message{"buffer/state", fmt.Sprintf(`{"state":"%s","ts":%d}`, word, m.now()/1e9)}
	}
	switch m.elapsed {
	case 0:
		all = append(all, m.stamped("cold/in", -5), m.stamped("cold/out", 1), state("up"))
	case coldMoves:
		all = append(all, m.stamped("cold/in", -4))
	case 1830:
		all = append(all, state("down"))
	}
	if m.elapsed%20 == 0 {
		all = append(all, m.stamped("buffer/pressure", m.bufferPressure()))
	}
	return all
}

// bufferPressure is that at which the carbon dioxide keeps the density that it had at
// 20 °C and 12 barg, in barg.
func (m *maltings) bufferPressure() float64 {
	gas := m.load("carbon dioxide buffer").Vessel.Fluid
	density := func(T, p float64) float64 {
		x, err := gas.At(T, p)
		if err != nil {
			m.Fatal(err)
		}
		return x.Density
	}
	lo, hi := 1.2e6, 1.6e6
	want, T := density(293.15, 1.2e6+m.site.Barometer), 293.15+bufferRise*float64(m.elapsed)
	for range 40 {
		if mid := (lo + hi) / 2; density(T, mid) < want {
			lo = mid
		} else {
			hi = mid
		}
	}
	return (lo - m.site.Barometer) / 1e5
}

func (m *maltings) load(name string) *site.HeatLoad {
	for i := range m.site.Loads {
		if m.site.Loads[i].Name == name {
			return &m.site.Loads[i]
		}
	}
	m.Fatalf("no load %q", name)
	return nil
}

func (m *maltings) state(name string) loads.LoadState {
	for i := range m.site.Loads {
		if m.site.Loads[i].Name == name {
			return m.books.engine.Snapshot().Loads[i]
		}
	}
	m.Fatalf("no load %q", name)
	return loads.LoadState{}
}

// duty holds the present duty of a load to want in W, within a part of it.
func (m *maltings) duty(name string, want, within float64) {
	m.Helper()
	f := m.state(name).Figure
	if !f.Measured() || !(math.Abs(f.Duty/want-1) <= within) {
		m.Errorf("%s after %d s: %.6g W (%v, %s); want %.6g W", name, m.elapsed, f.Duty, f.Fault, f.Reason, want)
	}
}

func (m *maltings) within(what string, got, want, by float64) {
	m.Helper()
	if !(math.Abs(got-want) <= by) {
		m.Errorf("%s: %.7g, want %.7g within %g", what, got, want, by)
	}
}

// What the file says is what the accounts do, from the payloads to duties and registers,
// against figures from outside: python-iapws (IF97) for water, by hand for the rest.
func TestMaltings(t *testing.T) {
	m := newMaltings(t)
	m.run(950 * time.Second)
	// The outlet belongs to what came in 100 s before, at −5 °C.
	m.within("yeast cooler, inlet in K", m.state("yeast cooler").Figure.Inlet, 268.15, 1e-9)
	m.within("fermenters, inlet in K", m.state("fermenters").Figure.Inlet, 269.15, 1e-9)
	m.run(30*time.Minute + time.Second)

	// 25 m³/h at 65 °C: 857.218 kW by python-iapws, and the pump's 2.2 kW, which the
	// stream serves as well. What is stored takes half of its 5 minutes to be told, at the
	// start and after the return was lost, from 60 s behind its last reading on; then a
	// straight line stands for the gap.
	const brew = 857_218 + 2200
	m.duty("brew house", brew, 2e-5)
	l := m.state("brew house")
	m.within("brew house, missing time in s", float64(l.Missing)/1e9, 150, 0)
	m.within("brew house, bridged time in s", float64(l.Bridged)/1e9, 245+150, 0)
	m.within("brew house, heat in J", l.Given+l.BridgedGiven, brew*(1801-150), brew*1651*2e-5)

	// 30 minutes at 1.8 L/s, in steps of 10 L and over the roll-over, and the heat meter.
	l = m.state("keg washer")
	m.within("keg washer, heat in J", l.Given, 3.24*washHeat, 0.01*washHeat)
	var witness, compared float64
	for _, x := range m.minutes {
		witness, compared = witness+x.Witness, compared+x.Compared
	}
	m.within("keg washer, witness over ours", witness/compared, 1.02, 0.02) // its steps of 1 kWh are 1 % each end

	// 7.5 t/h; (1500·65 + 3.5/2·(85² − 20²)) J/kg, of the file's cp.
	m.duty("malt kiln", 7.5/3.6*109_443.75, 1e-9)
	m.glycol()
	m.vessels()

	m.run(32 * time.Minute) // no beat, and the buffer's controller has gone
	for name, why := range map[string]string{
		"fermenters": "ostrel/cold/beat", "yeast cooler": "ostrel/cold/beat", "carbon dioxide buffer": "ostrel/buffer/state",
	} {
		if f := m.state(name).Figure; f.Fault != loads.Stale || !strings.Contains(f.Reason, why) {
			t.Errorf("%s without a sign of life: %v, %q; want %s in the reason", name, f.Fault, f.Reason, why)
		}
	}
	m.duty("brew house", brew, 2e-5)
}

// glycol holds the two loads on glycol to its own properties: 10 L a pulse, metered at
// the inlet, and 90 L of pipe at 0.9 L/s, which take 100 s.
func (m *maltings) glycol() {
	_, f := m.load("fermenters").Fluid()
	heat := func(T float64) float64 { // J from each m³ that comes in at T in °C and leaves at 1 °C
		in, err := f.At(273.15+T, 300.6e3)
		out, err2 := f.At(274.15, 300.6e3)
		if err != nil || err2 != nil {
			m.Fatal(err, err2)
		}
		return in.Density * (out.Enthalpy - in.Enthalpy)
	}
	m.within("fermenters, heat in J", m.state("fermenters").Taken, 0.01*coldPulses*(coldMoves*heat(-5)+900*heat(-4)), 0.01*heat(-5))
	m.duty("yeast cooler", 0.0009*heat(-4), 1e-9)
	l := m.state("yeast cooler") // for the first 100 s nobody knows what came in
	m.within("yeast cooler, missing time in s", float64(l.Missing)/1e9, 100, 1)
	m.within("yeast cooler, heat in J", l.Taken, 0.0009*(coldMoves*heat(-5)+801*heat(-4)), 0.0009*heat(-5))
}

func (m *maltings) vessels() {
	// 60 hL at the mean of the last ten minutes, 72.5 °C: 976.33 kg/m³ and 4189.76 J/(kg K)
	// by python-iapws; 2.4 t of stainless steel at 477 J/(kg K).
	m.duty("mash kettle", (6*976.33*4189.76+2400*477)*kettleRise, 2e-3)
	// 40 t of granite at 775 J/(kg K), and 900 kJ/K.
	m.duty("stone bed", (40e3*775+900e3)*stonesFall, 1e-6)
	// Carbon dioxide of the density that it had at first, with cv at the mean temperature.
	gas := m.load("carbon dioxide buffer").Vessel.Fluid
	first, err := gas.At(293.15, 12e5+m.site.Barometer)
	mean, err2 := gas.At(293.15+bufferRise*1500, 1e5*m.bufferPressure()+m.site.Barometer)
	if err != nil || err2 != nil {
		m.Fatal(err, err2)
	}
	m.duty("carbon dioxide buffer", 6*first.Density*mean.Cv*bufferRise, 1e-3)
}
