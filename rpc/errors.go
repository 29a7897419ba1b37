package rpc

import (
	"context"
	"errors"
	"fmt"
	"strings"
)

// Codes of errors. The first five are JSON-RPC 2.0's, the others those of the
// Language Server Protocol 3.17. There are no codes of our own.
const (
	CodeParse           = -32700 // the body is no JSON text
	CodeInvalidRequest  = -32600 // JSON, but no message that can be taken
	CodeMethodNotFound  = -32601
	CodeInvalidParams   = -32602
	CodeInternal        = -32603 // a fault of ours
	CodeNotInitialized  = -32002 // a request before initialize
	CodeRequestFailed   = -32803 // well formed, and still it could not be done
	CodeServerCancelled = -32802 // given up by the server: queue full, or ending
	CodeContentModified = -32801 // the version named is not the one held
	CodeCancelled       = -32800 // given up by the client
)

// Error is an error as it goes over the wire.
type Error struct {
	Code    int        `json:"code"`
	Message string     `json:"message"`
	Data    *ErrorData `json:"data,omitempty"`
}

// ErrorData says to a program what Message says to a person. Members that do
// not apply are absent.
type ErrorData struct {
	Function   string `json:"function,omitempty"`   // the catalogue function called
	Argument   string `json:"argument,omitempty"`   // the argument or member at fault
	Pointer    string `json:"pointer,omitempty"`    // JSON Pointer (RFC 6901) into params
	Reason     string `json:"reason,omitempty"`     // what is wrong with it, as the end of a sentence
	Suggestion string `json:"suggestion,omitempty"` // what to write instead

	Others []ErrorData `json:"others,omitempty"` // the same of every other argument at fault
}

func (e *Error) Error() string { return e.Message }

// internalFault is all that a client learns of a fault of ours; the rest goes
// to the error stream.
const internalFault = "The server met a fault of its own in this call and stopped it; other calls go on."

// knownCodes are the codes that may leave the server.
var knownCodes = map[int]bool{
	CodeParse: true, CodeInvalidRequest: true, CodeMethodNotFound: true, CodeInvalidParams: true, CodeInternal: true,
	CodeNotInitialized: true, CodeRequestFailed: true, CodeServerCancelled: true, CodeContentModified: true, CodeCancelled: true,
}

// wireError turns any error into one that may go over the wire. An *Error
// anywhere in the chain is taken as it is; a finished context means that the
// call was given up; anything else is a request that failed. Messages become one line.
func wireError(err error) *Error {
	var e *Error
	switch {
	case errors.As(err, &e) && e != nil && knownCodes[e.Code] && e.Message != "":
		if strings.ContainsAny(e.Message, "\r\n") {
			return &Error{Code: e.Code, Message: oneLine(e.Message), Data: e.Data}
		}
		return e
	case e != nil:
		return &Error{Code: CodeInternal, Message: internalFault}
	case errors.Is(err, context.Canceled), errors.Is(err, context.DeadlineExceeded):
		return errCancelled
	}
	text := oneLine(err.Error())
	if text == "" {
		return &Error{Code: CodeInternal, Message: internalFault}
	}
	return &Error{Code: CodeRequestFailed, Message: text}
}

var (
	errCancelled = &Error{Code: CodeCancelled, Message: "The client cancelled this call."}
	errEnding    = &Error{Code: CodeServerCancelled, Message: "The server is ending; the call was given up."}
)

// oneLine joins the lines and runs of blanks of a text.
func oneLine(text string) string { return strings.Join(strings.Fields(text), " ") }

// badParams is an error about one place in the params. Its message is the
// sentence that argument, reason and suggestion make.
func badParams(pointer, argument, reason, suggestion string) *Error {
	return badElement(pointer, argument, 0, reason, suggestion)
}

// badElement is badParams about one element of a list, counted from 1; 0 is
// the whole argument.
func badElement(pointer, argument string, element int, reason, suggestion string) *Error {
	message := reason
	switch {
	case argument != "" && element > 0:
		message = fmt.Sprintf("%s, element %d, %s", argument, element, reason)
	case argument != "":
		message = argument + " " + reason
	case element > 0:
		message = fmt.Sprintf("element %d %s", element, reason)
	}
	if suggestion != "" {
		message += "; " + suggestion
	}
	return &Error{Code: CodeInvalidParams, Message: message + ".",
		Data: &ErrorData{Argument: argument, Pointer: pointer, Reason: reason, Suggestion: suggestion}}
}

// pointerTo appends a member to a JSON Pointer (RFC 6901, section 3).
func pointerTo(pointer, member string) string {
	if strings.ContainsAny(member, "~/") {
		member = strings.NewReplacer("~", "~0", "/", "~1").Replace(member)
	}
	return pointer + "/" + member
}
