package rpc

import (
	"context"
	"crypto/sha256"
	"encoding/hex"
	"fmt"
	"reflect"

	"halfwidth/funcs"
)

// discoverMethods give the description of the protocol, under the name that
// OpenRPC 1.3 sets.
func discoverMethods() []Method {
	return []Method{
		{Name: "rpc.discover", Doc: "Gives this description of the methods, an OpenRPC document.",
			Result: func() object { return object{{"type", "object"}} },
			Handler: func(_ context.Context, call *Call) (any, error) {
				return call.Session.document(), nil
			}},
	}
}

// document is the OpenRPC document of the session's own methods. A method
// without a result is a notification.
func (s *Session) document() object {
	methods := []object{}
	for _, name := range s.names {
		if m := s.methods[name]; !m.Standard {
			methods = append(methods, m.document())
		}
	}
	return object{
		{"openrpc", "1.3.2"},
		{"info", object{{"title", ServerName}, {"version", s.options.Version},
			{"description", "Statistical functions over JSON-RPC 2.0, framed as in the base protocol of the Language Server Protocol 3.17, whose life cycle, cancelling and progress apply too. Schemas are JSON Schema 2020-12."}}},
		{"methods", methods},
	}
}

func (m *Method) document() object {
	params := []object{}
	if m.Params != nil {
		for i := range m.Params.NumField() {
			field := m.Params.Field(i)
			name, required := fieldOf(field)
			schema := typeSchema(field.Type)
			if name == progressMember {
				schema = object{{"type", []string{"string", "integer"}}}
			}
			params = append(params, object{{"name", name}, {"description", field.Tag.Get("doc")}, {"required", required}, {"schema", schema}})
		}
	}
	d := object{{"name", m.Name}, {"summary", m.Doc}, {"paramStructure", "by-name"}, {"params", params}}
	if m.Notification {
		return d
	}
	result := object{{"type", "null"}}
	if m.Result != nil {
		result = m.Result()
	}
	return append(d, entry{"result", object{{"name", "result"}, {"schema", result}}})
}

// typeSchema describes what a Go type is on the wire.
func typeSchema(t reflect.Type) object {
	switch t {
	case reflect.TypeFor[object](), faultyType:
		return object{{"type", "object"}}
	case valueType:
		return object{}
	}
	switch t.Kind() {
	case reflect.Pointer:
		return typeSchema(t.Elem())
	case reflect.String:
		return object{{"type", "string"}}
	case reflect.Bool:
		return object{{"type", "boolean"}}
	case reflect.Int:
		return object{{"type", "integer"}}
	case reflect.Float64:
		return object{{"type", "number"}}
	case reflect.Slice:
		return object{{"type", "array"}, {"items", typeSchema(t.Elem())}}
	case reflect.Map:
		return object{{"type", "object"}, {"additionalProperties", typeSchema(t.Elem())}}
	case reflect.Struct:
		properties, needed := object{}, []string{}
		for i := range t.NumField() {
			name, required := fieldOf(t.Field(i))
			properties = append(properties, entry{name, typeSchema(t.Field(i).Type)})
			if required {
				needed = append(needed, name)
			}
		}
		return object{{"type", "object"}, {"properties", properties}, {"required", needed}, {"additionalProperties", false}}
	}
	return object{} // anything
}

func listSchema() object { return typeSchema(reflect.TypeFor[[]listed]()) }

func descriptionSchema() object { return typeSchema(reflect.TypeFor[description]()) }

func answersSchema() object {
	failure := object{{"type", "object"}, {"properties", object{
		{"code", object{{"type", "integer"}}}, {"message", object{{"type", "string"}}}, {"data", object{{"type", "object"}}}}}, {"required", []string{"code", "message"}}}
	one := func(name string, schema object) object {
		return object{{"type", "object"}, {"properties", object{{name, schema}}}, {"required", []string{name}}, {"additionalProperties", false}}
	}
	return object{{"type", "array"}, {"items", object{{"oneOf", []object{one("outcome", outcomeSchema(nil)), one("error", failure)}}}}}
}

// announceCatalogue lets a client see whether the catalogue is the one whose
// list it has kept.
func announceCatalogue(_ *Client, capabilities map[string]any) {
	h := sha256.New()
	for _, f := range funcs.All() {
		fmt.Fprintf(h, "%s %d\n", f.Name, f.Version)
	}
	experimental, _ := capabilities["experimental"].(map[string]any)
	if own, ok := experimental["halfwidth"].(map[string]any); ok {
		own["catalogue"] = hex.EncodeToString(h.Sum(nil))[:16]
	}
}
