// The Worker that holds the one wasm instance. It answers one question at a time; client.ts keeps the queue.
import 'go/wasm_exec';

declare const CALC_WASM: string; // filled in by mkstatic: the hashed name
declare const Go: new () => { importObject: WebAssembly.Imports; run(instance: WebAssembly.Instance): Promise<void> };
declare function crossplumbReckon(
  op: string,
  json: string,
): { answer: string } | { code: string; field: string; message: string } | undefined;

export interface Question {
  id: number;
  op: string;
  json: string;
}

export type Reply =
  | { id: number; answer: string; ms: number }
  | { id: number; problem: { code: string; field: string; message: string }; ms: number }
  | { dead: string };

const scope = globalThis as unknown as {
  onmessage: (event: MessageEvent<Question>) => void;
  postMessage(reply: Reply): void;
};

// Questions that arrive while the wasm is still being compiled wait in this promise.
const ready = begin();

scope.onmessage = async ({ data }) => {
  try {
    await ready;
  } catch (error) {
    scope.postMessage({ dead: `calc could not start: ${error}` });
    return;
  }
  const from = performance.now();
  try {
    const out = crossplumbReckon(data.op, data.json);
    const ms = performance.now() - from;
    if (out === undefined) scope.postMessage({ dead: 'calc gave no answer' });
    else if ('answer' in out) scope.postMessage({ id: data.id, answer: out.answer, ms });
    else scope.postMessage({ id: data.id, problem: out, ms });
  } catch (error) {
    scope.postMessage({ dead: `calc stopped: ${error}` });
  }
};

async function begin(): Promise<void> {
  const go = new Go();
  const { instance } = await instantiate(go.importObject);
  // run resolves when the program ends, which is only when it has failed; the global is there as soon as it was called.
  void go.run(instance).then(() => scope.postMessage({ dead: 'calc ended' }));
}

async function instantiate(imports: WebAssembly.Imports): Promise<WebAssembly.WebAssemblyInstantiatedSource> {
  const response = await fetch(CALC_WASM);
  if (!response.ok) throw new Error(`${CALC_WASM}: ${response.status}`);
  if (response.headers.get('Content-Type') === 'application/wasm') {
    return WebAssembly.instantiateStreaming(response, imports);
  }
  // A proxy may have changed the type, which streaming refuses.
  return WebAssembly.instantiate(await response.arrayBuffer(), imports);
}
