import { fileURLToPath } from 'node:url';
import vue from '@vitejs/plugin-vue';
import Components from 'unplugin-vue-components/vite';
import { ElementPlusResolver } from 'unplugin-vue-components/resolvers';
import { defineConfig } from 'vitest/config';

const root = fileURLToPath(new URL('.', import.meta.url));

export default defineConfig({
  root,
  plugins: [
    vue(),
    // Only Element Plus's own tags are resolved on demand; our components are always imported by
    // name, so that every file says where its parts come from.
    Components({ dirs: [], dts: false, resolvers: [ElementPlusResolver()] }),
  ],
  build: { outDir: 'dist/client', emptyOutDir: true, chunkSizeWarningLimit: 700 },
  server: {
    host: '127.0.0.1',
    port: 5173,
    proxy: { '/api': `http://127.0.0.1:${process.env.PORT ?? '4180'}` },
  },
  test: {
    maxWorkers: 2,
    // For hangs only: a busy machine must not fail a test that is right.
    testTimeout: 30_000,
    hookTimeout: 30_000,
    projects: [
      {
        extends: true,
        test: {
          name: 'unit',
          include: ['{shared,server,worker}/**/*.test.ts', 'src/**/*.unit.test.ts'],
          environment: 'node',
        },
      },
      {
        extends: true,
        test: {
          name: 'component',
          include: ['src/**/*.test.ts'],
          exclude: ['src/**/*.unit.test.ts'],
          environment: 'happy-dom',
          server: { deps: { inline: ['element-plus'] } },
        },
      },
      {
        extends: true,
        test: { name: 'reference', include: ['tests/reference/**/*.test.ts'], environment: 'node' },
      },
      {
        extends: true,
        test: {
          name: 'api',
          include: ['tests/api/**/*.test.ts'],
          environment: 'node',
          globalSetup: ['tests/helpers/cluster-setup.ts'],
          testTimeout: 60_000,
          hookTimeout: 60_000,
        },
      },
      {
        extends: true,
        test: {
          name: 'e2e',
          include: ['tests/e2e/**/*.test.ts'],
          environment: 'node',
          globalSetup: ['tests/helpers/cluster-setup.ts', 'tests/helpers/demo-setup.ts'],
          testTimeout: 120_000,
          hookTimeout: 120_000,
          fileParallelism: false,
        },
      },
    ],
  },
});
