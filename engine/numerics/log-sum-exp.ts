/**
 * Sums of exponentials kept in logarithms. Role: weights of hypotheses and hyper-parameter nodes, whose likelihoods
 * under- and overflow long before their ratios do.
 */
import { refuse } from "../errors.ts";

/** ln of the sum of exp(values); -Infinity for an empty list or when every value is -Infinity. Refuses NaN. */
export function logSumExp(values: ArrayLike<number>): number {
  let largest = -Infinity;
  for (let i = 0; i < values.length; i++) {
    if (Number.isNaN(values[i])) refuse("not-a-number", `logarithm ${i + 1} of ${values.length} is not a number`);
    if (values[i] > largest) largest = values[i];
  }
  if (!Number.isFinite(largest)) return largest;
  let sum = 0;
  for (let i = 0; i < values.length; i++) sum += Math.exp(values[i] - largest);
  return largest + Math.log(sum);
}

/**
 * exp(values) scaled to sum to 1. Refuses (`no-weight`) when the total is zero or infinite, that is when no hypothesis
 * is possible at all. `out` may be the input itself when that is a Float64Array.
 */
export function weightsFromLogs(
  values: ArrayLike<number>,
  out: Float64Array = new Float64Array(values.length),
): Float64Array {
  const total = logSumExp(values);
  if (!Number.isFinite(total)) refuse("no-weight", `the ${values.length} weights sum to exp(${total})`);
  for (let i = 0; i < values.length; i++) out[i] = Math.exp(values[i] - total);
  return out;
}
