// Command engine is the program's engine as WebAssembly, for the worker of
// the page: the same packages that run in the server, behind one function.
//
// It sets the global object wakebackEngine with one method,
//
//	call(name: string, json: string): string
//
// which answers {"ok": ...} or {"error": {"code", "field", "message"}}. The
// calls are listed in calls.go. The engine holds the events and the tracks it
// was given; it has no clock, so every call that needs the time takes it.
package main
