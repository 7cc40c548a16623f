/**
 * The parts of ECharts that our pictures use, registered once. Import this only from components that draw charts:
 * the first route must not load it.
 */
import { BarChart, CustomChart, HeatmapChart, LineChart, ScatterChart } from 'echarts/charts';
import {
  AriaComponent,
  DataZoomComponent,
  GridComponent,
  MarkAreaComponent,
  MarkLineComponent,
  PolarComponent,
  TooltipComponent,
  VisualMapComponent,
} from 'echarts/components';
import { init, use } from 'echarts/core';
import { CanvasRenderer } from 'echarts/renderers';
import type { EChartsOption } from 'echarts';

use([
  BarChart,
  CustomChart,
  HeatmapChart,
  LineChart,
  ScatterChart,
  AriaComponent,
  DataZoomComponent,
  GridComponent,
  MarkAreaComponent,
  MarkLineComponent,
  PolarComponent,
  TooltipComponent,
  VisualMapComponent,
  CanvasRenderer,
]);

export { default as VChart } from 'vue-echarts';
export type { EChartsOption };

export interface PictureRequest {
  option: EChartsOption;
  theme: Record<string, unknown>;
  width: number;
  height: number;
  background: string;
}

/** The chart as SVG text, drawn anew: the one on the screen is a canvas. */
export async function chartSvg({ option, theme, width, height, background }: PictureRequest): Promise<Blob> {
  const { SVGRenderer } = await import('echarts/renderers');
  use(SVGRenderer);
  const chart = init(null, theme, { renderer: 'svg', ssr: true, width, height });
  try {
    chart.setOption({ ...option, animation: false, backgroundColor: background });
    return new Blob([chart.renderToSVGString()], { type: 'image/svg+xml' });
  } finally {
    chart.dispose();
  }
}

/** The chart as PNG at twice its size on the screen, on an opaque ground. */
export async function chartPng({ option, theme, width, height, background }: PictureRequest): Promise<Blob> {
  const canvas = document.createElement('canvas');
  const chart = init(canvas, theme, { renderer: 'canvas', width, height, devicePixelRatio: 2 });
  try {
    chart.setOption({ ...option, animation: false, backgroundColor: background });
    chart.getZr().flush();
    return await new Promise<Blob>((resolve, reject) => {
      canvas.toBlob((blob) =>
        blob ? resolve(blob) : reject(new Error('The browser could not make a PNG.')),
      );
    });
  } finally {
    chart.dispose();
  }
}
