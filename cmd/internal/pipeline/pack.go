package pipeline

import (
	"bytes"
	"compress/gzip"
	"encoding/json"
)

// pack is a value as it is stored whole: JSON, compressed.
func pack(v any) ([]byte, error) {
	var b bytes.Buffer
	z := gzip.NewWriter(&b)
	if err := json.NewEncoder(z).Encode(v); err != nil {
		return nil, err
	}
	if err := z.Close(); err != nil {
		return nil, err
	}
	return b.Bytes(), nil
}

// unpack reads what pack wrote.
func unpack(content []byte, into any) error {
	z, err := gzip.NewReader(bytes.NewReader(content))
	if err != nil {
		return err
	}
	return json.NewDecoder(z).Decode(into)
}
