/** A real object with some of its methods replaced: how tests bring a fault into a store or a queue that otherwise works. */
export function overriding<T extends object>(target: T, methods: Partial<T>): T {
  return new Proxy(target, {
    get(object, key) {
      const replaced = (methods as Record<PropertyKey, unknown>)[key];
      if (replaced !== undefined) return replaced;
      const value: unknown = Reflect.get(object, key);
      return typeof value === 'function' ? (value.bind(object) as unknown) : value;
    },
  });
}
