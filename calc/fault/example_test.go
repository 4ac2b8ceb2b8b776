package fault_test

import (
	"fmt"
	"os"
	"strings"

	"crossplumb/calc/codec"
	"crossplumb/calc/fault"
	"crossplumb/calc/sheet"
)

// A crossed pair over 1.9 km, expected at −59 dBm: near port 2 reads 12 dB less
// than its sister, and so does the far port it is tied to.
func ExampleRank() {
	doc, err := os.ReadFile("../../testdata/jobs/crossed-pair-go.json")
	if err != nil {
		fmt.Println(err)
		return
	}
	figures := `"radio_figures": {"power_control_off": true,
		"near": {"ports": [{"port": "1", "level_dbm": -59, "snr_db": 25, "return_loss_db": 19}, {"port": "2", "level_dbm": -71, "snr_db": 20, "return_loss_db": 3}]},
		"far": {"ports": [{"port": "1", "level_dbm": -71, "snr_db": 13}, {"port": "2", "level_dbm": -59, "snr_db": 31}]}},`
	v, p := codec.Parse([]byte(strings.Replace(strings.Replace(string(doc), `"radio_figures": null,`, "", 1), `"limits":`, figures+`"limits":`, 1)))
	if p != nil {
		fmt.Println(p)
		return
	}
	s, p := sheet.Read(v)
	if p != nil {
		fmt.Println(p)
		return
	}
	r, p := fault.Rank(s, v)
	if p != nil {
		fmt.Println(p)
		return
	}
	first := r.Candidates[0]
	fmt.Printf("%s (odds %.2f)\n%s\n", first.Name(), first.Odds, first.CheckNext)
	// Output:
	// feeder_wet 2 (odds 0.88)
	// Transmitter off, locked and tagged: open the connector seals of that feeder, look for water, compare with a dry day.
}
