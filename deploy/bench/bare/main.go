// Command bare is what stands beside the agent: a subscriber to all topics of a broker,
// with the agent's client library, that does nothing with a message but count it. For
// each line on standard input it writes the count to standard output.
//
// With -idle DIR instead of a broker it holds the three libraries of the agent open and
// does nothing at all: a client that is not connected, an empty database in DIR, and the
// metrics of the process served on a free port.
package main

import (
	"bufio"
	"errors"
	"flag"
	"fmt"
	"net"
	"net/http"
	"os"
	"path/filepath"
	"sync/atomic"

	mqtt "github.com/eclipse/paho.mqtt.golang"
	"github.com/prometheus/client_golang/prometheus"
	"github.com/prometheus/client_golang/prometheus/collectors"
	"github.com/prometheus/client_golang/prometheus/promhttp"
	bolt "go.etcd.io/bbolt"
)

func main() {
	broker := flag.String("broker", "", "`URL` of the broker, tcp://host:port")
	idle := flag.String("idle", "", "`DIR` for a database; connect to no broker")
	flag.Parse()
	if err := run(*broker, *idle); err != nil {
		fmt.Fprintln(os.Stderr, "error:", err)
		os.Exit(1)
	}
}

func run(broker, idle string) error {
	var count atomic.Int64
	o := mqtt.NewClientOptions().SetClientID("bare").SetCleanSession(false)
	o.SetDefaultPublishHandler(func(mqtt.Client, mqtt.Message) { count.Add(1) })
	if broker != "" {
		o.AddBroker(broker)
	}
	client := mqtt.NewClient(o)
	if idle != "" {
		if err := open(idle); err != nil {
			return err
		}
	} else if err := subscribe(client); err != nil {
		return err
	}
	fmt.Println("ready")
	for lines := bufio.NewScanner(os.Stdin); lines.Scan(); {
		fmt.Println(count.Load())
	}
	return nil
}

func subscribe(client mqtt.Client) error {
	for _, do := range []func() mqtt.Token{client.Connect, func() mqtt.Token { return client.Subscribe("#", 1, nil) }} {
		if t := do(); t.Wait() && t.Error() != nil {
			return t.Error()
		}
	}
	return nil
}

// open leaves what it opens to the end of the process.
func open(dir string) error {
	db, err := bolt.Open(filepath.Join(dir, "idle.db"), 0o600, nil)
	if err != nil {
		return err
	}
	err = db.Update(func(tx *bolt.Tx) error {
		_, err := tx.CreateBucketIfNotExists([]byte("idle"))
		return err
	})
	reg := prometheus.NewRegistry()
	reg.MustRegister(collectors.NewGoCollector(), collectors.NewProcessCollector(collectors.ProcessCollectorOpts{}))
	l, listening := net.Listen("tcp", "127.0.0.1:0")
	if err := errors.Join(err, listening); err != nil {
		return err
	}
	go http.Serve(l, promhttp.HandlerFor(reg, promhttp.HandlerOpts{}))
	return nil
}
