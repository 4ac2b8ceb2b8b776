// Debian's Chromium, one new profile a person, and pictures of what they saw.
import { mkdirSync, mkdtempSync, rmSync } from 'node:fs';
import os from 'node:os';
import path from 'node:path';
import { fileURLToPath } from 'node:url';
import { chromium } from 'playwright-core';

export const PHONE = { width: 390, height: 844 };
export const DESK = { width: 1280, height: 900 };

const root = path.join(path.dirname(fileURLToPath(import.meta.url)), '..', '..');
const pictures = path.join(process.env.ARTEFACTS ?? path.join(root, 'artefacts'), 'screens');

/** A browser with a profile of its own, on disk, so that it can be closed or killed and opened again. */
export async function openProfile(t, dir, viewport, options = {}) {
  const touch = viewport.width < 700;
  const context = await chromium.launchPersistentContext(dir, {
    executablePath: process.env.CHROMIUM ?? '/usr/bin/chromium',
    viewport,
    hasTouch: touch,
    isMobile: touch,
    deviceScaleFactor: touch ? 2 : 1,
    locale: 'en-GB',
    timezoneId: 'Europe/Madrid',
    args: [
      '--headless=new',
      '--no-sandbox', // tests run as root in containers
      '--disable-gpu',
      '--disable-quic',
      '--no-first-run',
      '--disable-background-networking',
      '--disable-component-update',
      '--disable-sync',
    ],
    ...options,
  });
  context.setDefaultTimeout(20_000);
  t.after(() => context.close());
  return context;
}

/** An empty folder that is gone when the process ends: only then has nothing a file open in it any more. */
export function temporary(name) {
  const dir = mkdtempSync(path.join(os.tmpdir(), `crossplumb-${name}-`));
  process.on('exit', () => rmSync(dir, { recursive: true, force: true, maxRetries: 5, retryDelay: 200 }));
  return dir;
}

/** Keeps what the person sees as a build artefact; a desk page as a whole, a phone as it lies in the hand. */
export async function picture(page, name) {
  mkdirSync(pictures, { recursive: true });
  const fullPage = page.viewportSize().width >= 700;
  await page.screenshot({ path: path.join(pictures, `${name}.png`), fullPage, animations: 'disabled' });
}

/** Gathers what a page complains of. A test that does not expect any of it asks for the list to be empty. */
export function complaints(page) {
  const list = [];
  page.on('pageerror', (error) => list.push(`exception: ${error.message}`));
  page.on('console', (message) => {
    if (message.type() === 'error') list.push(`console: ${message.text()}`);
  });
  return list;
}

/** Asks until the answer is right; the last answer is in the error. */
export async function until(what, ask, right = Boolean, ms = 15_000) {
  const end = Date.now() + ms;
  let last;
  for (;;) {
    try {
      last = await ask();
      if (right(last)) return last;
    } catch (error) {
      last = error;
    }
    if (Date.now() > end) throw new Error(`${what}: not within ${ms} ms; last: ${last instanceof Error ? last.stack : JSON.stringify(last)}`);
    await new Promise((resolve) => setTimeout(resolve, 50));
  }
}
