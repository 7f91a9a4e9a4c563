package report

import (
	"bytes"
	"fmt"
	"os"
	"strings"
)

// Names of the files of a result directory that do not depend on the hypotheses.
const (
	EvidenceFile = "evidence.json"
	ConfigFile   = "event.toml"
)

// WriteDirectory writes a result into a directory, made if it is missing:
// evidence.json (w), posterior-NAME.csv and posterior-NAME.parquet for each
// posterior, and event.toml (the config as run).
//
// Every file is rendered and on the disk before the first takes its name, so a
// failure up to there leaves what stood in the directory as it was. evidence.json
// takes its name last: a reader that finds a new one finds all that it names. Other
// files in the directory stay.
//
// A hypothesis whose Posterior is empty gets the name of its CSV file in the written
// document; w itself does not change.
func WriteDirectory(dir string, w *Weighing, posteriors []Posterior, configAsRun []byte) error {
	document := *w
	document.Hypotheses = append([]Hypothesis(nil), w.Hypotheses...)
	files := []file{{ConfigFile, configAsRun}}
	taken := map[string]string{}
	for i := range posteriors {
		p := &posteriors[i]
		name := PosteriorFile(p.Name, ".csv")
		// Some file systems do not tell capitals apart.
		key := strings.ToLower(name)
		if other, ok := taken[key]; ok {
			return fmt.Errorf("report: hypotheses %q and %q would share the file %s", other, p.Name, name)
		}
		taken[key] = p.Name
		var csv, parquet bytes.Buffer
		if err := p.WriteCSV(&csv); err != nil {
			return err
		}
		if err := p.WriteParquet(&parquet); err != nil {
			return err
		}
		files = append(files, file{name, csv.Bytes()}, file{PosteriorFile(p.Name, ".parquet"), parquet.Bytes()})
		for k := range document.Hypotheses {
			if h := &document.Hypotheses[k]; h.Name == p.Name && h.Posterior == "" {
				h.Posterior = name
			}
		}
	}
	var evidence bytes.Buffer
	if err := document.WriteJSON(&evidence); err != nil {
		return err
	}
	files = append(files, file{EvidenceFile, evidence.Bytes()})
	if err := os.MkdirAll(dir, 0o777); err != nil {
		return err
	}
	return writeStaged(dir, files)
}
