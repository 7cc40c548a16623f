/** Saving charts as pictures; loaded when somebody asks for one. */
import { init, use } from 'echarts/core';
import { SVGRenderer } from 'echarts/renderers';
import type { EChartsOption } from './chart-kit.ts';

use(SVGRenderer);

export interface PictureRequest {
  option: EChartsOption;
  theme: Record<string, unknown>;
  width: number;
  height: number;
  background: string;
}

/** The chart as SVG text, drawn anew: the one on the screen is a canvas. */
export function chartSvg({ option, theme, width, height, background }: PictureRequest): Blob {
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
