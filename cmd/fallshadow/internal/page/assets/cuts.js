// The cuts through the centre: data, thermal part and sum.
import { $, css } from "./dom.js";

/* global uPlot */

class Cut {
  constructor(id) {
    this.box = $(id);
    this.data = null;
    new ResizeObserver(() => this.fit()).observe(this.box);
  }

  fit() {
    const { clientWidth: width, clientHeight: height } = this.box;
    if (this.plot && width && height) this.plot.setSize({ width, height });
    else this.build();
  }

  build() {
    const { clientWidth: width, clientHeight: height } = this.box;
    this.plot?.destroy();
    this.plot = null;
    if (!width || !height || !this.data) return;
    const axis = { stroke: css("--muted"), grid: { stroke: css("--line"), width: 1 }, ticks: { show: false }, font: "11px system-ui" };
    this.plot = new uPlot({
      width, height, padding: [6, 8, 0, 0],
      scales: { x: { time: false, range: (u, low, high) => (low === null ? [-1, 1] : [Math.max(low, -this.reach), Math.min(high, this.reach)]) } },
      legend: { show: false }, cursor: { show: false },
      axes: [{ ...axis, size: 18, space: 50 }, { ...axis, size: 34, space: 22 }],
      series: [
        {},
        { stroke: css("--data"), paths: () => null, points: { show: true, size: 5, width: 0, fill: css("--data") } },
        { stroke: css("--thermal"), width: 2, dash: [6, 4], points: { show: false } },
        { stroke: css("--total"), width: 1.5, points: { show: false } },
      ],
    }, this.data, this.box);
  }

  // show draws a cut, if there is one, as far from the centre as the picture shows.
  show(cut, reach) {
    this.reach = reach;
    this.data = cut ? [cut.um, cut.data, cut.thermal, cut.total] : null;
    if (this.plot && cut) this.plot.setData(this.data);
    else this.build();
  }
}

export class Cuts {
  constructor() {
    this.cuts = [new Cut("cut1"), new Cut("cut2")];
  }

  show(view, reach) {
    this.cuts.forEach((c, i) => c.show(view?.cuts?.[i], reach));
  }

  recolour() {
    this.cuts.forEach((c) => c.build());
  }
}
