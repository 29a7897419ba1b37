package rpc

import (
	"context"
	"reflect"
	"slices"
)

// Handler answers one call. It is run in turn, on the goroutine that reads
// messages, so that it sees every change sent before the call and none sent
// after; it must be quick there. A handler with more to do captures what it
// needs and returns Later; one whose method is marked Long is run by a worker
// as a whole. ctx ends when the client cancels the call or the server ends.
type Handler func(ctx context.Context, call *Call) (any, error)

// Method is one row of the table that dispatch, the list given at initialize
// and the description of the protocol are made from.
type Method struct {
	Name         string
	Doc          string        // one sentence
	Params       reflect.Type  // struct of the params by name; nil: it has none
	Result       func() object // JSON Schema of the result; nil: null, or LSP's
	Notification bool          // sent without an id, never answered
	When         Phase         // when it may be called
	Long         bool          // the whole handler is run by a worker
	Standard     bool          // named by the Language Server Protocol
	Handler      Handler

	// Announce adds what the method offers to the capabilities of the
	// initialize reply. It may be nil.
	Announce func(client *Client, capabilities map[string]any)
}

// Phase says when a method may be called.
type Phase uint8

const (
	Running  Phase = iota // after initialize and before shutdown
	Starting              // instead: before initialize
	Always                // at any time
)

// Methods gives a table for one session. What the rows share is theirs alone,
// so that two sessions in one process do not meet.
func Methods() []Method {
	return slices.Concat(lifecycleMethods(), functionMethods(), sheetMethods(), workbookMethods(), textMethods(), discoverMethods())
}

// Later is returned by a handler that has read its params and captured what it
// needs, and leaves the rest to a worker.
func Later(run func(ctx context.Context) (any, error)) (any, error) {
	return later(run), nil
}

type later func(ctx context.Context) (any, error)

// Strict gives a row the params of type P, decoded as decodeStrict says.
func Strict[P any](m Method, handle func(ctx context.Context, call *Call, params P) (any, error)) Method {
	return typed(m, handle, decodeStrict)
}

// Lenient gives a row the params of type P, decoded by encoding/json, which
// passes over members it does not know, as LSP asks.
func Lenient[P any](m Method, handle func(ctx context.Context, call *Call, params P) (any, error)) Method {
	return typed(m, handle, decodeLenient)
}

func typed[P any](m Method, handle func(context.Context, *Call, P) (any, error), decode func([]byte, any) error) Method {
	m.Params = reflect.TypeFor[P]()
	m.Handler = func(ctx context.Context, call *Call) (any, error) {
		var params P
		if err := decode(call.Params, &params); err != nil {
			return nil, err
		}
		return handle(ctx, call, params)
	}
	return m
}
