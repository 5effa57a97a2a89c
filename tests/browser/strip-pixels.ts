import type { Page } from 'playwright-core'

/** How many pixels of the trace are copper, and how many canvases of lanes hold any ink. */
export async function drawnPixels(page: Page): Promise<{ readonly trace: number; readonly lanes: number }> {
  return page.evaluate(() => {
    const inked = (
      canvas: HTMLCanvasElement,
      wanted: (r: number, g: number, b: number, a: number) => boolean,
    ): number => {
      const data = canvas.getContext('2d')?.getImageData(0, 0, canvas.width, canvas.height).data ?? []
      let count = 0
      for (let i = 0; i < data.length; i += 4) {
        if (wanted(data[i]!, data[i + 1]!, data[i + 2]!, data[i + 3]!)) count++
      }
      return count
    }
    const trace = document.querySelector<HTMLCanvasElement>('.trace-plot canvas')
    const lanes = [...document.querySelectorAll<HTMLCanvasElement>('.lane-canvas')]
    return {
      // #95490f, the copper of the light set, with room for smoothing.
      trace:
        trace === null
          ? 0
          : inked(trace, (r, g, b, a) => a > 200 && Math.abs(r - 0x95) < 24 && Math.abs(g - 0x49) < 24 && b < 60),
      lanes: lanes.filter((canvas) => inked(canvas, (_r, _g, _b, a) => a > 0) > 0).length,
    }
  })
}
