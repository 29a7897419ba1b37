// Package rpc answers JSON-RPC 2.0 requests framed as in the base protocol of
// the Language Server Protocol 3.17, over any pair of byte streams.
//
// Contract:
//   - Nothing but frames is written to the output. Remarks for people go to the
//     third stream, one line each, and are dropped rather than waited for.
//   - Every request is answered exactly once, with the text of its id as it
//     came. A message that cannot be read is answered with id null, and the
//     connection goes on at the next Content-Length line.
//   - Messages are taken in the order of arrival. Notifications and quick calls
//     run to their end before the next message is looked at (soon.go: unless one
//     turns out not to be quick); long calls run on a few workers, from what their
//     handler captured while it was still in turn.
//   - A result never holds NaN or an infinite number, an error never has code 0.
//
// The questions (functions.go) go through arguments.go, which turns JSON into
// the values and expressions that the descriptor names, to package funcs, and
// come back through outcome.go. schema.go and openrpc.go describe both ways from
// the same descriptors.
//
// The documents of an editor (textdoc.go) are kept as immutable states, one for
// each version (textdoc_state.go); textdoc_live.go has the newest worked out
// (newest.go) and publishes what textdoc_findings.go makes of it. completion.go,
// hover.go, signature.go, actions.go, hints.go and symbols.go answer from the
// state that was the newest when the question came.
//
// Open sheets (sheets.go, cells.go) are frames that never change; a change makes
// new ones, which share what stayed. A liveBook (publish.go) has the newest state
// of a book worked out, keeping the outcomes of rows that read nothing changed,
// and told.go finds what is new to the client. Files are filled by
// workbooks_fill.go. PROTOCOL.md describes all of it from outside, openrpc.json
// for programs.
//
// A message passes, in this order: frames.go (bytes to bodies), envelope.go (a
// body to its members), transport.go (a reply of the client's to the library, or an
// answer to a faulty message), session.go (life cycle, order, cancelling), a handler of the
// table in methods.go, and writer.go (the reply to bytes).
package rpc
