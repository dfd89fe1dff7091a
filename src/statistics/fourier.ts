/** Discrete Fourier transform of a power-of-two length, in place, split planes: out[m] = Σ_n in[n] exp(+2πi n m/N). O(N log N). */
export function fourier(re: Float64Array, im: Float64Array): void {
  const size = re.length;
  for (let i = 1, j = 0; i < size; i++) {
    let bit = size >> 1;
    for (; j & bit; bit >>= 1) j ^= bit;
    j ^= bit;
    if (i < j) {
      [re[i], re[j]] = [re[j], re[i]];
      [im[i], im[j]] = [im[j], im[i]];
    }
  }
  const cos = new Float64Array(size / 2);
  const sin = new Float64Array(size / 2);
  for (let k = 0; k < size / 2; k++) {
    cos[k] = Math.cos((2 * Math.PI * k) / size);
    sin[k] = Math.sin((2 * Math.PI * k) / size);
  }
  for (let length = 2; length <= size; length *= 2) {
    const half = length / 2;
    const stride = size / length;
    for (let start = 0; start < size; start += length) {
      for (let k = 0; k < half; k++) {
        const a = start + k;
        const b = a + half;
        const tRe = re[b] * cos[k * stride] - im[b] * sin[k * stride];
        const tIm = re[b] * sin[k * stride] + im[b] * cos[k * stride];
        re[b] = re[a] - tRe;
        im[b] = im[a] - tIm;
        re[a] += tRe;
        im[a] += tIm;
      }
    }
  }
}
