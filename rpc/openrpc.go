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

// document is the OpenRPC document of the session's own methods.
func (s *Session) document() object {
	var methods []*Method
	for _, name := range s.names {
		methods = append(methods, s.methods[name])
	}
	return openRPC(methods)
}

// openRPC describes the methods that LSP does not. One without a result is a
// notification. OpenRPC has no place for notifications that a server sends;
// they stand under x-notifications, in the form of methods.
func openRPC(table []*Method) object {
	methods, sent := []object{}, []object{}
	for _, m := range table {
		if !m.Standard {
			methods = append(methods, m.document())
		}
	}
	for _, m := range sentNotifications() {
		sent = append(sent, m.document())
	}
	return object{
		{"openrpc", "1.3.2"},
		{"info", object{{"title", ServerName}, {"version", fmt.Sprint(ProtocolVersion)},
			{"description", "Statistical functions over JSON-RPC 2.0, framed as in the base protocol of the Language Server Protocol 3.17, whose life cycle, cancelling and progress apply too. Schemas are JSON Schema 2020-12. The version is that of the protocol; initialize gives the program's."}}},
		{"methods", methods},
		{"x-notifications", sent},
	}
}

// sentNotifications are the notifications to the client that LSP does not
// describe.
func sentNotifications() []Method {
	return []Method{
		{Name: publishMethod, Notification: true, Params: reflect.TypeFor[publication](),
			Doc: "Tells what a change of an open book altered in its results."},
		{Name: refusedMethod, Notification: true, Params: reflect.TypeFor[sheetRefusal](),
			Doc: "Tells that a message about a sheet was not taken, so that the sheet is not held until sheets/didOpen of it comes again."},
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
	case cellsType:
		return blocksSchema()
	case reflect.TypeFor[Error]():
		return errorSchema()
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

func errorSchema() object {
	return object{{"type", "object"}, {"properties", object{
		{"code", object{{"type", "integer"}}}, {"message", object{{"type", "string"}}}, {"data", object{{"type", "object"}}}}}, {"required", []string{"code", "message"}}}
}

func answersSchema() object {
	one := func(name string, schema object) object {
		return object{{"type", "object"}, {"properties", object{{name, schema}}}, {"required", []string{name}}, {"additionalProperties", false}}
	}
	return object{{"type", "array"}, {"items", object{{"oneOf", []object{one("outcome", outcomeSchema(nil)), one("error", errorSchema())}}}}}
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
