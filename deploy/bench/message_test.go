package bench

import (
	"fmt"
	"strconv"
	"testing"
)

// BenchmarkMessage runs the agent and the bare subscriber at the same time on the same
// messages of one broker, and tells what each of them costs both: an iteration is a second of
// the plant. The agent decodes, validates, computes every load each second, and commits; what it
// seals comes an hour later, and is told by BenchmarkSeal in store. MiB is the most that
// was resident, and MiB-anonymous what of it no file stands behind.
func BenchmarkMessage(b *testing.B) {
	for _, loads := range []int{10, 1000} {
		b.Run(fmt.Sprintf("%d-loads", loads), func(b *testing.B) {
			broker := mosquitto(b)
			p := newPlant(loads)
			listen := freeAddress(b)
			agent := launch(b, program(b, "heatreeve"), "run", "--site", p.siteFile(b, broker), "--data", b.TempDir(), "--listen", listen)
			bare := launch(b, program(b, "bare"), "-broker", "tcp://"+broker)
			bare.line(b)
			eventually(b, "the agent subscribes", func() bool {
				sums, ok := scrape(listen)
				return ok && int(sums["heatreeve_broker_subscribed_topics"]) == len(p.topics)
			})
			p.connect(b, broker)
			p.second(b) // the first of each tag, and what is set up for it
			before, agentCPU, bareCPU := p.sent, agent.cpu(b), bare.cpu(b)
			var most, anonymous, mostBare float64
			for b.Loop() {
				p.second(b)
				all, anon := agent.memory(b)
				most, anonymous = max(most, all), max(anonymous, anon)
				all, _ = bare.memory(b)
				mostBare = max(mostBare, all)
			}
			agentCPU, bareCPU = agent.cpu(b)-agentCPU, bare.cpu(b)-bareCPU
			checkCounts(b, p, bare, listen)
			messages := float64(p.sent - before)
			b.ReportMetric(float64(agentCPU)/1e3/messages, "µs/message")
			b.ReportMetric(float64(bareCPU)/1e3/messages, "µs/message-bare")
			b.ReportMetric(most/(1<<20), "MiB")
			b.ReportMetric(anonymous/(1<<20), "MiB-anonymous")
			b.ReportMetric(mostBare/(1<<20), "MiB-bare")
		})
	}
}

// waits is how many seconds of messages it takes until the first duties are there: event time
// waits for stragglers.
const waits = 10

// checkCounts fails unless both have got every message, and the loads a duty.
func checkCounts(b *testing.B, p *plant, bare *process, listen string) {
	b.Helper()
	eventually(b, "the bare subscriber has every message", func() bool {
		fmt.Fprintln(bare.in)
		n, err := strconv.Atoi(bare.line(b))
		return err == nil && n == p.sent
	})
	eventually(b, "the agent has every message", func() bool {
		sums, ok := scrape(listen)
		computed := sums["heatreeve_load_duty_watts"] > 0 || p.sent < waits*len(p.topics)
		return ok && int(sums["heatreeve_tag_readings_total"]) == p.sent && computed && sums["heatreeve_tag_late_readings_total"] == 0
	})
}

// BenchmarkIdle tells what the three libraries of the agent keep resident when they do nothing.
func BenchmarkIdle(b *testing.B) {
	for b.Loop() {
		idle := launch(b, program(b, "bare"), "-idle", b.TempDir())
		idle.line(b)
		all, anonymous := idle.memory(b)
		b.ReportMetric(all/(1<<20), "MiB")
		b.ReportMetric(anonymous/(1<<20), "MiB-anonymous")
		idle.end()
	}
}
