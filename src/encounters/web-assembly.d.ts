/** The part of WebAssembly's JavaScript interface that the kernel needs; Node's own types leave it out. */
declare namespace WebAssembly {
  class Module {
    constructor(bytes: Uint8Array);
    private readonly brand;
  }
  class Memory {
    constructor(size: { initial: number });
    readonly buffer: ArrayBuffer;
  }
  class Global {
    value: number;
  }
  class Instance {
    constructor(module: Module, imports: Record<string, Record<string, unknown>>);
    readonly exports: Record<string, unknown>;
  }
}
