import { CustomChart } from 'echarts/charts';
import { GridComponent } from 'echarts/components';
import { init, use } from 'echarts/core';
import { SVGRenderer } from 'echarts/renderers';
import { readFileSync } from 'node:fs';
import { chromium } from 'playwright-core';
import { fixtureAnswer, fixtureTokens } from '/work/main/src/components/comparison/answer.fixture.ts';
import { differenceScale } from '/work/main/src/components/comparison/difference-scale.ts';
import { histogramPicture } from '/work/main/src/components/comparison/histogram-option.ts';
import { rosePicture } from '/work/main/src/components/comparison/rose-option.ts';
import { bandHourPicture } from '/work/main/src/components/comparison/band-hour-option.ts';
import { forestPicture } from '/work/main/src/components/comparison/forest-option.ts';
use([CustomChart, GridComponent, SVGRenderer]);
const css = readFileSync('/work/main/src/styles/tokens.css','utf8');
function tokens(block: string) { const t: any = {...fixtureTokens}; for (const m of block.matchAll(/--([a-z0-9-]+): (#[0-9a-f]+);/g)) t[m[1]!] = m[2]; return t; }
const dark = tokens(css.split("data-theme='light'")[0]!);
const light = tokens(css.split("data-theme='light'")[1]!.split("data-theme='night'")[0]!);
let html = '<meta charset=utf8><style>body{margin:0;font-family:sans-serif}</style>';
for (const [t, w, compact] of [[dark, 640, false],[light,640,false],[dark,340,true]] as any) {
  const answer = fixtureAnswer(); 
  html += `<div style="background:${t.surface};padding:10px;display:grid;grid-template-columns:repeat(${compact?1:2},${w}px);gap:10px;width:${compact?360:1310}px">`;
  for (const b of [histogramPicture, rosePicture, bandHourPicture, forestPicture]) {
    const p = b({answer, scale: differenceScale(answer), tokens: t, lit: compact ? answer.sectors[1]! : null, compact});
    const c = init(null, null, {renderer:'svg', ssr:true, width:w, height:p.heightPx}); c.setOption(p.option); html += `<div>${c.renderToSVGString()}</div>`;
  }
  html += '</div>';
}
const browser = await chromium.launch({ executablePath: '/usr/bin/chromium', args: ['--no-sandbox','--disable-gpu','--disable-background-networking'] });
const page = await browser.newPage({ viewport: {width: 1330, height: 900} });
await page.setContent(html); await page.screenshot({ path: '/tmp/compare/pics.png', fullPage: true }); await browser.close();
