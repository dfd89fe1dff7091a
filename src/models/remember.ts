/** Remembers the last few results of a costly pure function, so that neighbouring points of a sweep share them. */

/** @param limit results kept; the oldest is forgotten first */
export function remember<A, R>(limit: number, keyOf: (argument: A) => string, compute: (argument: A) => R): (argument: A) => R {
  const known = new Map<string, R>();
  return (argument) => {
    const key = keyOf(argument);
    const found = known.get(key);
    if (found !== undefined) return found;
    const result = compute(argument);
    const [oldest] = known.keys();
    if (known.size >= limit && oldest !== undefined) known.delete(oldest);
    known.set(key, result);
    return result;
  };
}
