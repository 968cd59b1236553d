/** The last few values by their keys. */
export class Recent<T> {
  private readonly values = new Map<string, T>();
  constructor(private readonly most: number) {}

  /** Throws where nothing stands under `key`: a caller's fault. */
  get(key: string): T {
    const value = this.values.get(key);
    if (value === undefined) throw new Error('nothing is kept under this key');
    this.set(key, value);
    return value;
  }

  of(key: string, make: () => T): T {
    const value = this.values.has(key) ? this.get(key) : make();
    this.set(key, value);
    return value;
  }

  set(key: string, value: T): void {
    this.values.delete(key);
    this.values.set(key, value);
    if (this.values.size > this.most) this.values.delete(this.values.keys().next().value!);
  }
}
