package wire

import (
	"bytes"
	"encoding/json"
	"fmt"

	"google.golang.org/protobuf/encoding/protojson"
	"google.golang.org/protobuf/proto"
)

// Marshal writes a message canonically: fields in the order of the descriptor, zero values where they are set, no white space. The stock
// encoder varies white space, and nothing else, from build to build; compacting takes that away.
func Marshal(m proto.Message) ([]byte, error) {
	loose, err := protojson.Marshal(m)
	if err != nil {
		return nil, fmt.Errorf("wire: %w", err)
	}
	var compact bytes.Buffer
	compact.Grow(len(loose))
	if err := json.Compact(&compact, loose); err != nil {
		return nil, fmt.Errorf("wire: %w", err)
	}
	return compact.Bytes(), nil
}
