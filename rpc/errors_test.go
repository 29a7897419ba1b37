package rpc

import (
	"context"
	"errors"
	"fmt"
	"testing"
)

func TestWireErrors(t *testing.T) {
	inner := badParams("/a", "a", "is null", "leave it out")
	for _, test := range []struct {
		err  error
		code int
		text string
	}{
		{inner, CodeInvalidParams, "a is null; leave it out."},
		{fmt.Errorf("while reading: %w", inner), CodeInvalidParams, "a is null; leave it out."},
		{errors.Join(errors.New("x"), inner), CodeInvalidParams, "a is null; leave it out."},
		{context.Canceled, CodeCancelled, errCancelled.Message},
		{fmt.Errorf("stopped: %w", context.DeadlineExceeded), CodeCancelled, errCancelled.Message},
		{errors.New("no file\nof that name"), CodeRequestFailed, "no file of that name"},
		{errors.New(""), CodeInternal, internalFault},
		{&Error{}, CodeInternal, internalFault},
		{&Error{Code: 0, Message: "zero"}, CodeInternal, internalFault},
		{&Error{Code: -32050, Message: "our own"}, CodeInternal, internalFault},
		{&Error{Code: CodeContentModified, Message: "two\nlines"}, CodeContentModified, "two lines"},
	} {
		if got := wireError(test.err); got.Code != test.code || got.Message != test.text {
			t.Errorf("%v became %d %q, want %d %q", test.err, got.Code, got.Message, test.code, test.text)
		}
	}
}
