// A value that can be watched. Views read it through the hook in use.ts.

export interface Watchable<T> {
  readonly value: T;
  /** Calls back at each change, not at once; returns the function that ends it. */
  watch(listener: (value: T) => void): () => void;
}

export class Observable<T> implements Watchable<T> {
  private current: T;
  private readonly listeners = new Set<(value: T) => void>();

  constructor(first: T) {
    this.current = first;
  }

  get value(): T {
    return this.current;
  }

  set(value: T): void {
    if (Object.is(value, this.current)) return;
    this.current = value;
    for (const listener of [...this.listeners]) listener(value);
  }

  watch(listener: (value: T) => void): () => void {
    this.listeners.add(listener);
    return () => this.listeners.delete(listener);
  }
}
