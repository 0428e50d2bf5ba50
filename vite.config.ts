// How is the viewer's page built?

import { readFileSync } from 'node:fs';
import { defineConfig } from 'vite';
import type { Plugin } from 'vite';

/** The page carries three.js inside it, so it carries its licence too. */
const licences: Plugin = {
  name: 'licences',
  generateBundle() {
    const text = readFileSync(new URL('./node_modules/three/LICENSE', import.meta.url), 'utf8');
    this.emitFile({ type: 'asset', fileName: 'licences.txt', source: `three.js\n\n${text}` });
  },
};

export default defineConfig({
  root: 'viewer/page',
  // Relative addresses: the page works wherever its folder is served from.
  base: './',
  plugins: [licences],
  build: {
    outDir: '../../dist/viewer/page',
    emptyOutDir: true,
    target: 'es2022',
    // Nothing is inlined as data: the page's policy allows its own files only.
    assetsInlineLimit: 0,
    modulePreload: { polyfill: false },
    // three.js alone is above the default limit; it is served from this machine.
    chunkSizeWarningLimit: 1200,
  },
});
