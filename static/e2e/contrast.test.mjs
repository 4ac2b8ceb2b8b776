// Colours of the three themes: every pair that carries text at 7:1 at least (WCAG 2.2, 1.4.6), every drawn line that
// carries meaning at 3:1 at least (1.4.11). Read from the style itself.
import assert from 'node:assert/strict';
import { readFileSync } from 'node:fs';
import { test } from 'node:test';

const css = readFileSync(new URL('../style/raw.css', import.meta.url), 'utf8');

/** Relative luminance and contrast ratio as WCAG 2.2 defines them. */
function luminance(hex) {
  const [r, g, b] = [1, 3, 5].map((i) => parseInt(hex.slice(i, i + 2), 16) / 255).map((c) => (c <= 0.04045 ? c / 12.92 : ((c + 0.055) / 1.055) ** 2.4));
  return 0.2126 * r + 0.7152 * g + 0.0722 * b;
}

function contrast(a, b) {
  const [light, dark] = [luminance(a), luminance(b)].sort((x, y) => y - x);
  return (light + 0.05) / (dark + 0.05);
}

function theme(name) {
  const block = new RegExp(`:root\\[data-theme='${name}'\\] \\{([^}]*)\\}`).exec(css);
  assert.ok(block, `theme ${name}`);
  return Object.fromEntries([...block[1].matchAll(/--raw-([a-z-]+): (#[0-9a-f]{6});/g)].map(([, key, value]) => [key, value]));
}

const texts = [
  ['ink', 'paper'], ['ink', 'paper-deep'], ['ink', 'sheet'], ['ink-soft', 'paper'], ['ink-soft', 'paper-deep'], ['paper', 'ink'],
  ['wine', 'paper'], ['wine', 'sheet'], ['green', 'paper'], ['ochre', 'paper'],
  ['go-text', 'go-ground'], ['nogo-text', 'nogo-ground'], ['again-text', 'again-ground'],
];
const lines = [['steel', 'paper'], ['ghost', 'paper'], ['ghost', 'sheet'], ['wine', 'paper'], ['focus', 'paper']];

test('the ratio is that of the standard', () => {
  assert.equal(contrast('#000000', '#ffffff'), 21);
  // WCAG's own technique pages give #767676 as the lightest grey with 4.5:1 on white.
  assert.ok(contrast('#767676', '#ffffff') >= 4.5 && contrast('#777777', '#ffffff') < 4.5);
});

for (const name of ['day', 'dark', 'night']) {
  test(`theme ${name}: text at 7:1, lines that mean something at 3:1`, () => {
    const colours = theme(name);
    for (const [pairs, least] of [[texts, 7], [lines, 3]]) {
      for (const [over, under] of pairs) {
        const ratio = contrast(colours[over], colours[under]);
        assert.ok(ratio >= least, `${over} ${colours[over]} on ${under} ${colours[under]}: ${ratio.toFixed(2)}, wanted ${least}`);
      }
    }
  });
}
