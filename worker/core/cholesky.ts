/**
 * Solves a symmetric positive definite system by Cholesky's factors. `matrix` [n x n] row-major, only its lower triangle
 * is read; `right` [n].
 */
export function solve(matrix: Float64Array, right: Float64Array): Float64Array {
  const n = right.length
  const lower = matrix.slice()
  const x = right.slice()
  for (let j = 0; j < n; j++) {
    for (let i = j; i < n; i++) {
      let sum = lower[i * n + j]
      for (let k = 0; k < j; k++) sum -= lower[i * n + k] * lower[j * n + k]
      lower[i * n + j] = i === j ? Math.sqrt(sum) : sum / lower[j * n + j]
    }
  }
  for (let i = 0; i < n; i++) {
    for (let k = 0; k < i; k++) x[i] -= lower[i * n + k] * x[k]
    x[i] /= lower[i * n + i]
  }
  for (let i = n - 1; i >= 0; i--) {
    for (let k = i + 1; k < n; k++) x[i] -= lower[k * n + i] * x[k]
    x[i] /= lower[i * n + i]
  }
  return x
}
