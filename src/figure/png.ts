import { Resvg, initWasm } from '@resvg/resvg-wasm';

/** What turns SVG into PNG: the bytes of `@resvg/resvg-wasm/index_bg.wasm` and of the TTF fonts to set text in. */
export interface PngTools {
  readonly wasm: Uint8Array | ArrayBuffer | WebAssembly.Module;
  /** DejaVu Sans first, its bold after it. */
  readonly fonts: readonly Uint8Array[];
}

let ready: Promise<void> | undefined;

/**
 * An SVG of this folder as PNG bytes, `zoom` image pixels a px. Text is set in the fonts given and no
 * other, so that every machine makes the same picture. Throws where the SVG is not well formed.
 */
export async function pngFromSvg(svg: string, tools: PngTools, zoom = 2): Promise<Uint8Array> {
  // The wasm module is loaded once a thread; a second load is refused by it.
  ready ??= initWasm(tools.wasm as BufferSource | WebAssembly.Module).catch((error: unknown) => {
    ready = undefined;
    throw error;
  });
  await ready;
  const renderer = new Resvg(svg, {
    fitTo: { mode: 'zoom', value: zoom },
    imageRendering: 1,
    font: { fontBuffers: [...tools.fonts], defaultFontFamily: 'DejaVu Sans', sansSerifFamily: 'DejaVu Sans' },
  });
  try {
    const image = renderer.render();
    const png = image.asPng();
    image.free();
    return png;
  } finally {
    renderer.free();
  }
}
