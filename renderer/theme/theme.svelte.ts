export type Theme = 'system' | 'light' | 'dark';

const KEY = 'entasis.theme';

/** Light or dark: the system's, unless the switch says otherwise. */
export class ThemeSwitch {
  chosen = $state<Theme>('system');
  #systemDark = $state(false);

  readonly dark = $derived(this.chosen === 'system' ? this.#systemDark : this.chosen === 'dark');

  constructor() {
    const query = matchMedia('(prefers-color-scheme: dark)');
    this.#systemDark = query.matches;
    query.addEventListener('change', () => (this.#systemDark = query.matches));
    this.choose((localStorage.getItem(KEY) as Theme | null) ?? 'system');
  }

  choose(theme: Theme): void {
    this.chosen = theme;
    if (theme === 'system') delete document.documentElement.dataset['theme'];
    else document.documentElement.dataset['theme'] = theme;
    localStorage.setItem(KEY, theme);
  }

  /** To the other side of what is seen now; back to the system's where that is the same. */
  toggle(): void {
    const target: Theme = this.dark ? 'light' : 'dark';
    this.choose((target === 'dark') === this.#systemDark ? 'system' : target);
  }
}
