// How is the viewer's page built?

import { defineConfig } from 'vite';

export default defineConfig({
  root: 'viewer/page',
  // Relative addresses: the page works wherever its folder is served from.
  base: './',
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
