package serve_test

import (
	"bytes"
	"encoding/csv"
	"fmt"
	"strings"
	"testing"

	"leat/api/operation"
	"leat/api/serve"
	"leat/api/wire"
)

// TestContractFormats sends the bulk examples in every form and asks for every form; each answer is judged by the contract on its way.
func TestContractFormats(t *testing.T) {
	s := startService(t)
	for _, op := range operation.All() {
		lines := strings.Split(strings.TrimSpace(string(example(t, "bulk."+op.Name+".request.ndjson"))), "\n")
		features := make([]string, len(lines))
		for i, line := range lines {
			features[i] = fmt.Sprintf(`{"type":"Feature","geometry":{"type":"Point","coordinates":[%d,2]},"properties":%s}`, i, line)
		}
		bodies := map[string]string{
			ndjsonMedia: strings.Join(lines, "\n"), jsonMedia: "[" + strings.Join(lines, ",") + "]",
			"application/geo+json": `{"type":"FeatureCollection","features":[` + strings.Join(features, ",") + `]}`, "text/csv": "id,units\nx,us\n",
		}
		_, flat := op.Form.(wire.Flat)
		for in, body := range bodies {
			for _, out := range []string{ndjsonMedia, jsonMedia, "application/geo+json", "text/csv"} {
				for _, query := range []string{"", "?flat=true", "?flat=true&prefix=leat_"} {
					rows := query != "" || out == "application/geo+json" || out == "text/csv"
					want := 200
					switch {
					case rows && !flat, out == "application/geo+json" && in != out, strings.Contains(query, "prefix") && out == "text/csv" && in != out:
						want = 406
					}
					status, header, answer := s.send("POST", "/v1/bulk/"+op.Name+query, []byte(body), "Content-Type", in, "Accept", out)
					if strings.Contains(query, "prefix") && in == "text/csv" && status == 200 && !bytes.Contains(answer, []byte("id")) {
						t.Errorf("%s: what is handed through is missing: %s", op.Name, answer)
					}
					if status != want || status == 200 && !strings.HasPrefix(header.Get("Content-Type"), out) {
						t.Errorf("%s from %s to %s%s: %d, want %d: %s", op.Name, in, out, query, status, want, answer)
					}
				}
			}
		}
	}
}

// The contract describes the columns of flat answers as they are.
func TestContractHasTheFlatColumns(t *testing.T) {
	s := startService(t)
	contract, err := serve.LoadContract()
	if err != nil {
		t.Fatal(err)
	}
	for _, op := range operation.All() {
		table := wire.FlatTableOf(op.Form)
		if table == nil {
			continue
		}
		properties := contract.Document.Components.Schemas[strings.ToUpper(op.Name[:1])+op.Name[1:]+"Row"].Value.Properties
		for _, column := range table.Columns() {
			p := properties[column.Name]
			if p == nil {
				t.Errorf("%s: the contract does not describe %s", op.Name, column.Name)
				continue
			}
			if unit, _ := p.Value.Extensions["x-ogc-unit"].(string); column.Type == wire.FlatNumber && wire.SI.UCUM(column.Quantity) != "" && unit != wire.SI.UCUM(column.Quantity) {
				t.Errorf("%s: %s is in %s, the contract says %s", op.Name, column.Name, wire.SI.UCUM(column.Quantity), unit)
			}
		}
		if len(properties) != len(table.Columns()) {
			t.Errorf("%s: %d columns, the contract describes %d", op.Name, len(table.Columns()), len(properties))
		}
		_, answer := s.post("/v1/bulk/"+op.Name+"?flat=true", ndjsonMedia, []byte("{}"))
		if !bytes.HasPrefix(answer, []byte(`{"id":null,"line":1,"units":null,`)) {
			t.Errorf("%s: %s", op.Name, answer)
		}
		_, header, body := s.send("POST", "/v1/bulk/"+op.Name, []byte("[]"), "Content-Type", jsonMedia, "Accept", "text/csv")
		records, err := csv.NewReader(bytes.NewReader(body)).ReadAll()
		if err != nil || len(records) != 1 || len(records[0]) != len(properties) || header.Get("Leat-Lines") != "0" {
			t.Errorf("%s: %v %v", op.Name, records, err)
		}
	}
}
