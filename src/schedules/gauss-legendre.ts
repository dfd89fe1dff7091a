/**
 * Gauss–Legendre nodes and weights on [−1, 1], ascending, by Newton's iteration on the Legendre polynomial (Digital Library of
 * Mathematical Functions, 3.5(v)). Weights sum to 2; accurate to a few ulp for the sizes used here (up to some hundreds).
 */
export interface QuadratureRule {
  readonly nodes: Float64Array;
  readonly weights: Float64Array;
}

export function gaussLegendre(size: number): QuadratureRule {
  const nodes = new Float64Array(size);
  const weights = new Float64Array(size);
  for (let i = 0; i < (size + 1) / 2; i++) {
    let x = Math.cos((Math.PI * (i + 0.75)) / (size + 0.5));
    let derivative = 0;
    for (let iteration = 0; iteration < 100; iteration++) {
      let previous = 1;
      let value = x;
      for (let k = 2; k <= size; k++) {
        const next = ((2 * k - 1) * x * value - (k - 1) * previous) / k;
        previous = value;
        value = next;
      }
      derivative = (size * (x * value - previous)) / (x * x - 1);
      const change = value / derivative;
      x -= change;
      if (Math.abs(change) < 1e-15) break;
    }
    const weight = 2 / ((1 - x * x) * derivative * derivative);
    nodes[i] = -x;
    nodes[size - 1 - i] = x;
    weights[i] = weight;
    weights[size - 1 - i] = weight;
  }
  return { nodes, weights };
}
