// The real server as a child process, with a data folder and a port that outlive it: it can be killed and started again.
import assert from 'node:assert/strict';
import { spawn } from 'node:child_process';
import { readFileSync } from 'node:fs';
import net from 'node:net';
import path from 'node:path';
import { fileURLToPath } from 'node:url';
import { uuidv7 } from 'uuidv7';
import { until } from './browser.mjs';

const root = path.join(path.dirname(fileURLToPath(import.meta.url)), '..', '..');
const program = process.env.CROSSPLUMB_BIN ?? path.join(root, 'bin', 'crossplumb');

export const SUPERVISOR = { name: 'Maren Holt', passphrase: 'four green bollards' };
export const CLIMBER = { name: 'Idris Vane', passphrase: 'wet rope dry rope' };
export const CREW = 'north';

export class Crossplumb {
  #child = null;
  #printed = '';
  #log = '';
  #session = '';

  constructor(data, port) {
    this.data = data;
    this.port = port;
    this.address = `http://127.0.0.1:${port}`;
  }

  /** Starts on an empty folder, or on what a server before it left there. */
  static async open(t, data) {
    const server = new Crossplumb(data, await freePort());
    t.after(() => server.kill());
    await server.start();
    return server;
  }

  async start() {
    assert.equal(this.#child, null);
    this.#printed = '';
    const child = spawn(program, ['serve', '--data', this.data, '--listen', `127.0.0.1:${this.port}`], { stdio: ['ignore', 'pipe', 'pipe'] });
    child.stdout.on('data', (text) => (this.#printed += text));
    child.stderr.on('data', (text) => (this.#log += text));
    this.#child = child;
    let ended = null;
    child.on('exit', (code, signal) => (ended = `${code ?? signal}`));
    child.on('error', (error) => (ended = String(error)));
    await until('the server answers', async () => {
      if (ended !== null) throw new Error(`${program} ended with ${ended}: ${this.#printed}${this.#log}`);
      return (await fetch(`${this.address}/healthz`)).ok;
    });
  }

  /** SIGKILL: no handler runs, nothing is written any more. */
  async kill() {
    const child = this.#child;
    this.#child = null;
    if (!child || child.exitCode !== null) return;
    const gone = new Promise((resolve) => child.once('exit', resolve));
    child.kill('SIGKILL');
    await gone;
  }

  get log() {
    return this.#log;
  }

  /** Asks the API as the supervisor; any status is handed back. */
  async ask(method, route, body) {
    const response = await fetch(this.address + route, {
      method,
      headers: { Cookie: this.#session, ...(method === 'GET' ? {} : { 'X-Crossplumb': '1', 'Content-Type': 'application/json' }) },
      body: body === undefined ? undefined : JSON.stringify(body),
    });
    const text = await response.text();
    return { status: response.status, body: text ? JSON.parse(text) : null, cookie: response.headers.get('Set-Cookie')?.split(';')[0] ?? '' };
  }

  async must(method, route, body) {
    const answer = await this.ask(method, route, body);
    assert.ok(answer.status >= 200 && answer.status < 300, `${method} ${route}: ${answer.status} ${JSON.stringify(answer.body)}`);
    return answer.body;
  }

  /** The first supervisor by the link that was printed, and a climber by a link that the supervisor made. */
  async people() {
    const link = await until('the one-time link', () => /\S+#\S*invitation=\S+/.exec(this.#printed)?.[0]);
    const opened = await this.ask('POST', '/api/session', { invitation: invitationOf(link), ...SUPERVISOR });
    assert.equal(opened.status, 200, JSON.stringify(opened.body));
    this.#session = opened.cookie;
    const { link: second } = await this.must('POST', '/api/people/invitations', { role: 'climber', crew: CREW });
    return { climberLink: second };
  }

  /** A job whose one mount is a sheet of testdata/jobs. Its near end is unmeasured: the crew is to do that. */
  async job(sheetName, site) {
    const sheet = JSON.parse(readFileSync(path.join(root, 'testdata', 'jobs', sheetName), 'utf8'));
    for (const antenna of sheet.near.antennas) {
      for (const states of [antenna.position_mm, antenna.azimuth, antenna.tilt, antenna.skew]) {
        if (states) Object.assign(states, { as_found: null, as_left: null });
      }
    }
    const id = uuidv7();
    await this.must('POST', '/api/jobs', {
      id,
      site,
      title: 'Alignment after the storm',
      crew: CREW,
      visit_on: '2026-12-02',
      access: 'Gate key at the harbour office',
      emergency: 'Island rescue, 555 0112',
      lat_deg: 60.1,
      lon_deg: -1.2,
      mounts: [{ id: 'm1', name: 'north-east', sheet }],
    });
    return id;
  }
}

export function invitationOf(link) {
  return decodeURIComponent(/invitation=([^&\s]+)/.exec(link)[1]);
}

async function freePort() {
  const probe = net.createServer();
  await new Promise((resolve) => probe.listen(0, '127.0.0.1', resolve));
  const { port } = probe.address();
  await new Promise((resolve) => probe.close(resolve));
  return port;
}
