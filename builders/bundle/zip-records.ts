/** The three records of a plain zip, as both the writer and the reader know them (PKWARE APPNOTE 6.3). */
export const LOCAL = 0x04034b50;
export const CENTRAL = 0x02014b50;
export const END = 0x06054b50;
/** Lengths without names. */
export const LOCAL_BYTES = 30;
export const CENTRAL_BYTES = 46;
export const END_BYTES = 22;
/** 1980-01-01 as a DOS date, the first day that an entry can be dated; midnight is 0. */
export const ZIP_EPOCH_DOS_DATE = 0x0021;
/** A plain file that its owner may write and all may read, in the upper half. */
export const ATTRIBUTES = (0o100644 << 16) >>> 0;
