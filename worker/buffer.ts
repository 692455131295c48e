/** The little of Node's `buffer` that ndarray-fft's pool of arrays asks for; the pool's byte buffers are never used here. */
export const Buffer = Uint8Array
export default { Buffer }
