import type { Configuration } from 'electron-builder';

/**
 * How the desktop program is packaged: `npx electron-builder --linux` (or `--win`, `--mac`) after `npm run build`, on the
 * system it is for. Signing is left to whoever distributes it: see DEVELOPERS.md.
 */
export default {
  appId: 'org.entasis.desktop',
  productName: 'Entasis',
  copyright: 'MIT licence',
  directories: { output: 'dist', buildResources: 'resources/icons' },
  files: ['out/**', 'package.json', 'LICENSE', 'resources/demonstration/**', 'resources/loaders/**', '!**/*.map'],
  asar: true,
  // Native code is loaded from, and reads, real files only.
  asarUnpack: ['node_modules/@duckdb/**', 'resources/demonstration/**'],
  // DuckDB brings its native part built for each system.
  npmRebuild: false,
  publish: null,
  electronFuses: {
    runAsNode: false,
    enableCookieEncryption: true,
    enableNodeOptionsEnvironmentVariable: false,
    enableNodeCliInspectArguments: false,
    enableEmbeddedAsarIntegrityValidation: true,
    onlyLoadAppFromAsar: true,
    loadBrowserProcessSpecificV8Snapshot: false,
    grantFileProtocolExtraPrivileges: false,
  },
  linux: {
    target: ['AppImage', 'deb'],
    category: 'Science',
    maintainer: 'Entasis',
    synopsis: 'Response matrices from tagged events',
  },
  win: { target: ['nsis', 'zip'] },
  nsis: {
    oneClick: false,
    perMachine: false,
    allowToChangeInstallationDirectory: true,
    deleteAppDataOnUninstall: false,
  },
  mac: {
    target: ['dmg', 'zip'],
    category: 'public.app-category.education',
    hardenedRuntime: true,
    gatekeeperAssess: false,
  },
} satisfies Configuration;
