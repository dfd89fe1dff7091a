/** Waits for a condition instead of for a time. */
export async function waitFor(condition: () => boolean | Promise<boolean>, what: string, timeoutMs = 50_000): Promise<void> {
  const deadline = performance.now() + timeoutMs;
  while (!(await condition())) {
    if (performance.now() > deadline) throw new Error(`gave up waiting: ${what}`);
    await new Promise((resolve) => setTimeout(resolve, 10));
  }
}

/** A promise that is settled from outside. */
export function gate(): { readonly opened: Promise<void>; readonly open: () => void } {
  let open = (): void => undefined;
  const opened = new Promise<void>((resolve) => (open = resolve));
  return { opened, open };
}
