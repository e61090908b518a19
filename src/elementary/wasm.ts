const modules = new Map<string, WebAssembly.Module>();

function bytesOf(base64: string): Uint8Array<ArrayBuffer> {
  const text = atob(base64);
  const bytes = new Uint8Array(text.length);
  for (let i = 0; i < text.length; i++) bytes[i] = text.charCodeAt(i);
  return bytes;
}

/** Whether this runtime can compile a kernel: it may lack an extension of WebAssembly. */
export const isValid = (base64: string): boolean => WebAssembly.validate(bytesOf(base64));

/** The compiled module of a kernel given in base64; compiled once per thread. */
export function moduleOf(base64: string): WebAssembly.Module {
  let module = modules.get(base64);
  if (!module) {
    module = new WebAssembly.Module(bytesOf(base64));
    modules.set(base64, module);
  }
  return module;
}

/**
 * Instantiates a kernel. Kernels are compiled without assertions, so `abort` is reached only by a defect of ours.
 * @throws Error where the host has no WebAssembly SIMD
 */
export function instantiate(base64: string, env: Record<string, unknown>): WebAssembly.Exports {
  const abort = () => {
    throw new Error('a kernel aborted; this is a defect of Fieldassay, please report it with the scenario');
  };
  return new WebAssembly.Instance(moduleOf(base64), { env: { abort, ...env } as WebAssembly.ModuleImports }).exports;
}
