package demo

import (
	"context"
	"encoding/json"
	"fmt"
	"net/http"
	"time"

	"wakeback/search/incident"
)

// AskServer reads the incidents of a server that lets anyone on this machine
// read, over its API: base is its address, as in http://localhost:8317.
func AskServer(base string) Ask {
	client := &http.Client{Timeout: 2 * time.Second}
	return func(ctx context.Context) ([]incident.State, error) {
		req, err := http.NewRequestWithContext(ctx, http.MethodGet, base+"/api/v1/incidents", nil)
		if err != nil {
			return nil, fmt.Errorf("ask for the incidents: %w", err)
		}
		resp, err := client.Do(req)
		if err != nil {
			return nil, fmt.Errorf("ask for the incidents: %w", err)
		}
		defer resp.Body.Close()
		if resp.StatusCode != http.StatusOK {
			return nil, fmt.Errorf("ask for the incidents: %s", resp.Status)
		}
		var list struct {
			Incidents []incident.State `json:"incidents"`
		}
		if err := json.NewDecoder(resp.Body).Decode(&list); err != nil {
			return nil, fmt.Errorf("read the incidents: %w", err)
		}
		return list.Incidents, nil
	}
}
