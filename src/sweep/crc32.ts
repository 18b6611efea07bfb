const POLYNOMIAL = 0xedb88320;

const TABLE = Uint32Array.from({ length: 256 }, (_, byte) => {
  let value = byte;
  for (let bit = 0; bit < 8; bit++) value = value & 1 ? POLYNOMIAL ^ (value >>> 1) : value >>> 1;
  return value;
});

/**
 * CRC-32 of bytes, the one of gzip and PNG (ISO/IEC 13239; polynomial 0xEDB88320 reflected). Finds damage, not malice.
 *
 * @param bytes The bytes.
 * @returns Eight hexadecimal digits.
 */
export function crc32(bytes: Uint8Array): string {
  let value = 0xffffffff;
  for (let i = 0; i < bytes.length; i++) value = TABLE[(value ^ bytes[i]) & 0xff] ^ (value >>> 8);
  return ((value ^ 0xffffffff) >>> 0).toString(16).padStart(8, "0");
}
