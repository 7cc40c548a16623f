import { mount } from '@vue/test-utils';
import { afterEach, describe, expect, it } from 'vitest';
import { createMemoryHistory, createRouter } from 'vue-router';
import { methodIds } from '../../../shared/methods/method-ids.ts';
import MethodsView from '../../views/MethodsView.vue';
import MethodLink from '../base/MethodLink.vue';

async function routerAt(path: string) {
  const router = createRouter({
    history: createMemoryHistory(),
    routes: [
      { path: '/s/:stationId/methods', name: 'methods', component: MethodsView },
      { path: '/s/:stationId/compare', name: 'compare', component: { template: '<i />' } },
      { path: '/shared', name: 'shared', component: { template: '<i />' } },
    ],
  });
  await router.push(path);
  return router;
}

afterEach(() => {
  document.body.innerHTML = '';
});

describe('the link from a figure to its method', () => {
  it('leads to the entry of the same station and says what it explains', async () => {
    const router = await routerAt('/s/7/compare');
    const link = mount(MethodLink, { props: { term: 'design-effect' }, global: { plugins: [router] } }).get(
      'a',
    );
    expect(link.attributes('href')).toBe('/s/7/methods#design-effect');
    expect(link.attributes('aria-label')).toBe('How the design effect is computed');
    expect(link.text()).toBe('How?');
  });

  it('begins its accessible name with the word that is seen', async () => {
    const router = await routerAt('/s/7/compare');
    const link = mount(MethodLink, {
      props: { term: 'interval', label: 'The interval' },
      global: { plugins: [router] },
    });
    expect(link.get('a').attributes('aria-label')).toBe('The interval: how the 95 % interval is computed');
  });

  it('is not there for a guest, who has no Methods page', async () => {
    const router = await routerAt('/shared');
    const link = mount(MethodLink, { props: { term: 'unit' }, global: { plugins: [router] } });
    expect(link.find('a').exists()).toBe(false);
  });

  it('is not there without a router either', () => {
    expect(
      mount(MethodLink, { props: { term: 'unit' } })
        .find('a')
        .exists(),
    ).toBe(false);
  });
});

describe('the Methods page', () => {
  async function open(path: string) {
    const router = await routerAt(path);
    const page = mount(MethodsView, { attachTo: document.body, global: { plugins: [router] } });
    await router.isReady();
    return { router, page };
  }

  it('has an article under the anchor of every id, named by its title', async () => {
    const { page } = await open('/s/7/methods');
    const articles = page.findAll('article').map(({ element }) => ({
      id: element.id,
      labelledBy: element.getAttribute('aria-labelledby'),
      titleId: element.querySelector('h3')?.id,
    }));
    expect(articles.map(({ id }) => id).sort()).toEqual([...methodIds].sort());
    for (const { labelledBy, titleId } of articles) expect(labelledBy).toBe(titleId);
  });

  it('brings the keyboard to the entry of the address', async () => {
    const { router } = await open('/s/7/methods?find=guard#sensitivity');
    await expect.poll(() => document.activeElement?.id).toBe('sensitivity');
    await router.push({ query: { find: 'guard' }, hash: '#guard' });
    await expect.poll(() => document.activeElement?.id).toBe('guard');
  });

  it('shows only what holds the words looked for, kept in the address', async () => {
    const { router, page } = await open('/s/7/methods?find=odds');
    await page.get('input[type="search"]').setValue('mcnemar');
    await expect.poll(() => router.currentRoute.value.query.find).toBe('mcnemar');
    await expect
      .poll(() => page.findAll('article').map((article) => article.attributes('id')))
      .toEqual(['odds-ratio']);
    expect(page.get('[role="status"]').text()).toBe('1 entry with these words');
  });

  it('says what to do when nothing holds the words, and shows all again', async () => {
    const { page } = await open('/s/7/methods?find=zzz');
    expect(page.text()).toContain('No entry holds all of these words');
    await page.get('.empty button').trigger('click');
    await expect.poll(() => page.findAll('article').length).toBe(methodIds.length);
  });

  it('takes the filter away for a link to an entry that it hides', async () => {
    const { router, page } = await open('/s/7/methods?find=mcnemar');
    await router.push({ query: { find: 'mcnemar' }, hash: '#guard' });
    await expect.poll(() => document.activeElement?.id).toBe('guard');
    expect(router.currentRoute.value.query.find).toBe(undefined);
    expect(page.findAll('article')).toHaveLength(methodIds.length);
  });
});
