package agent

import (
	"context"
	"encoding/json"
	"fmt"
	"heatreeve/agent/answer"
	"io"
	"net/http"
	"net/url"
	"time"
)

// answerBytes bounds what is read of an agent's answer.
const answerBytes = 64 << 20

// Inquire answers q from a history: a data folder, or a copy of its file. Where an agent
// runs on the folder, it is asked. What is wrong with q is a [*QueryError].
func Inquire(ctx context.Context, data string, q answer.Query) (r *answer.Report, err error) {
	err = reach(data, func(a address) (err error) {
		r, err = ask(ctx, a, q)
		return err
	}, func(h history) (err error) {
		r, err = h.report(ctx, q)
		return err
	})
	if err != nil {
		return nil, err
	}
	return r, nil
}

// ask has the agent at a answer.
func ask(ctx context.Context, a address, q answer.Query) (*answer.Report, error) {
	return request[answer.Report](ctx, a, reportPath, q.Values(), reportTime, answerBytes)
}

// request has the agent at a answer a path, which it does within the time, by at most so
// many bytes of JSON.
func request[T any](ctx context.Context, a address, path string, values url.Values, within time.Duration, most int64) (answer *T, err error) {
	ctx, cancel := context.WithTimeout(ctx, within+10*time.Second)
	defer cancel()
	err = a.get(ctx, path, values, func(resp *http.Response) error {
		body, err := io.ReadAll(io.LimitReader(resp.Body, most))
		if err != nil {
			return fmt.Errorf("agent at %s: %w", a.hostPort, err)
		}
		answer, err = understand[T](a, resp.StatusCode, body)
		return err
	})
	return answer, err
}

// understand reads an agent's answer.
func understand[T any](a address, status int, body []byte) (*T, error) {
	if status != http.StatusOK {
		return nil, refusal(status, body)
	}
	answer := new(T)
	if err := json.Unmarshal(body, answer); err != nil {
		return nil, fmt.Errorf("agent at %s: its answer of %d bytes: %w", a.hostPort, len(body), err)
	}
	return answer, nil
}
