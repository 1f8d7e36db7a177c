//go:build browser

package page_test

import (
	"context"
	"testing"
)

// faint lists the texts in sight whose contrast with what is behind them is below that of
// WCAG 2.2, 1.4.3 (AA): 4.5, or 3 for large ones; and texts that stick out of their panel.
// Texts on a picture and on what cannot be pressed are left out.
const faint = `(() => {
	const numbers = (color) => color.match(/[\d.]+/g).map(Number);
	const parse = (color) => {
		const [r, g, b, alpha] = numbers(color);
		return color.startsWith("color(") ? [255 * r, 255 * g, 255 * b, alpha ?? 1] : [r, g, b, alpha ?? 1];
	};
	const over = (a, b) => [0, 1, 2].map((i) => a[i] * a[3] + b[i] * (1 - a[3])).concat(1);
	const behind = (node) => {
		const layers = [];
		for (; node; node = node.parentElement) layers.unshift(parse(getComputedStyle(node).backgroundColor));
		return layers.reduce((below, layer) => over(layer, below), [255, 255, 255, 1]);
	};
	const linear = (v) => (v / 255 <= 0.04045 ? v / 255 / 12.92 : ((v / 255 + 0.055) / 1.055) ** 2.4);
	const luminance = ([r, g, b]) => 0.2126 * linear(r) + 0.7152 * linear(g) + 0.0722 * linear(b);
	const found = [];
	const texts = document.createTreeWalker(document.body, NodeFilter.SHOW_TEXT);
	for (let text = texts.nextNode(); text; text = texts.nextNode()) {
		const node = text.parentElement, what = text.textContent.trim();
		if (!what || !node.checkVisibility() || node.closest("svg, option, .bar, :disabled")) continue;
		const style = getComputedStyle(node), back = behind(node);
		const [low, high] = [luminance(back), luminance(over(parse(style.color), back))].sort((a, b) => a - b);
		const ratio = (high + 0.05) / (low + 0.05), size = parseFloat(style.fontSize);
		const enough = size >= 24 || (size >= 18.66 && style.fontWeight >= 700) ? 3 : 4.5;
		if (!(ratio >= enough)) found.push(what + ": contrast " + ratio.toFixed(2));
		const panel = node.closest("section, header, #notes, dialog")?.getBoundingClientRect();
		const range = document.createRange();
		range.selectNodeContents(text);
		const out = (r) => r.right > panel.right + 1 || r.left < panel.left - 1;
		if (panel && style.textOverflow !== "ellipsis" && [...range.getClientRects()].some(out)) found.push(what + ": outside");
	}
	return found;
})()`

// readable wants all texts in sight to be read.
func readable(t *testing.T, tab context.Context, where string) {
	t.Helper()
	for _, what := range eval[[]string](t, tab, faint) {
		t.Errorf("%s: %s", where, what)
	}
}

// What is not to be read is found.
func testFaint(t *testing.T, tab context.Context) {
	t.Helper()
	eval[bool](t, tab, `(() => {
		const panel = document.querySelector('#numbers'), add = (style) => panel.append(Object.assign(document.createElement('p'), { className: 'probe', textContent: 'probe', style }));
		add('color: #888; background: #999');
		add('margin-left: 9999px');
		return true;
	})()`)
	if got := eval[[]string](t, tab, faint); len(got) < 2 {
		t.Errorf("what cannot be read is taken for good: %q", got)
	}
	eval[bool](t, tab, `(document.querySelectorAll('.probe').forEach((p) => p.remove()), true)`)
}
