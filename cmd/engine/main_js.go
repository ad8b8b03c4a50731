//go:build js && wasm

package main

import "syscall/js"

func main() {
	s := newSession()
	call := js.FuncOf(func(_ js.Value, args []js.Value) any {
		if len(args) != 2 || args[0].Type() != js.TypeString || args[1].Type() != js.TypeString {
			return `{"error":{"code":"usage","field":"","message":"call(name, json) takes two strings"}}`
		}
		return s.call(args[0].String(), args[1].String())
	})
	js.Global().Set("wakebackEngine", js.ValueOf(map[string]any{"call": call}))
	if ready := js.Global().Get("wakebackEngineReady"); ready.Type() == js.TypeFunction {
		ready.Invoke()
	}
	select {} // the page calls in for as long as it lives
}
