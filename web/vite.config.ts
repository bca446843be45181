import { defineConfig } from 'vite'

/** The pages: one bundle of scripts and one of styles, no inline code (the server's content security policy refuses it). */
export default defineConfig({
  root: import.meta.dirname,
  base: './',
  build: {
    outDir: '../dist/web',
    emptyOutDir: true,
    target: 'es2022',
    assetsInlineLimit: 0,
    modulePreload: false,
    chunkSizeWarningLimit: 600,
  },
})
