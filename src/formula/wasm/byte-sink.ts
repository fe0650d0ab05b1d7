/** Bytes that are written one after the other, of any number. */
export class ByteSink {
  private buffer = new Uint8Array(256);
  private length = 0;

  append(bytes: ArrayLike<number>): void {
    const end = this.length + bytes.length;
    if (end > this.buffer.length) {
      const larger = new Uint8Array(Math.max(end, 2 * this.buffer.length));
      larger.set(this.buffer.subarray(0, this.length));
      this.buffer = larger;
    }
    // Most pieces have a few bytes: a loop is quicker than a call.
    if (bytes.length < 32) for (let k = 0; k < bytes.length; k++) this.buffer[this.length + k] = bytes[k];
    else this.buffer.set(bytes, this.length);
    this.length = end;
  }

  /** All bytes so far; what is appended later may overwrite none of them. */
  bytes(): Uint8Array<ArrayBuffer> {
    return this.buffer.slice(0, this.length);
  }
}
