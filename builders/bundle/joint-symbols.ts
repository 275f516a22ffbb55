/** What several devices of a package hold: an image each, and the data of its HEX by rising address; each of one length for all. */
export interface HexOfImage {
  image: Uint8Array;
  hex: Uint8Array;
}

/** One number for every offset of the images and for every byte of the HEX files. */
export interface JointSymbols {
  image: Uint32Array;
  hex: Uint32Array;
}

/**
 * Makes many images one: two places get the same number where, and only where, every device holds the same byte in both. What
 * fits by these numbers fits for all devices at once.
 */
export function jointSymbols(devices: readonly [HexOfImage, ...HexOfImage[]]): JointSymbols {
  const image = new Uint32Array(devices[0].image.length);
  const hex = new Uint32Array(devices[0].hex.length);
  for (const device of devices) {
    const numbers = new Map<number, number>();
    addBytes(image, device.image, numbers);
    addBytes(hex, device.hex, numbers);
  }
  return { image, hex };
}

function addBytes(symbols: Uint32Array, bytes: Uint8Array, numbers: Map<number, number>): void {
  for (let i = 0; i < symbols.length; i++) {
    const key = (symbols[i] as number) * 256 + (bytes[i] as number);
    const known = numbers.get(key);
    symbols[i] = known ?? numbers.size;
    if (known === undefined) numbers.set(key, numbers.size);
  }
}
