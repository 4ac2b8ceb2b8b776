// The glue between Go and JavaScript, from the GOROOT of the compiler (mkstatic); it sets globalThis.Go.
declare module 'go/wasm_exec';
