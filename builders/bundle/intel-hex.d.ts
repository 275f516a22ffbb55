/** The part of the npm package `intel-hex` 0.2.0 that is used; it ships no types. */
declare module "intel-hex" {
  const intelHex: {
    parse(data: string, bufferSize?: number, addressOffset?: number): { data: Buffer };
  };
  export default intelHex;
}
