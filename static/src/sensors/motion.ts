// The phone's accelerometer: the only file that touches the sensor interface. What is listened to is the whole acceleration
// with gravity in it; angles are calc's to make. Whether a permission has to be asked is found out by looking for the
// function, never by the browser's name.

/** What one stretch of listening gathered, in the form that tilt.face takes. */
export interface Gathered {
  t_s: number[];
  ax_m_s2: number[];
  ay_m_s2: number[];
  az_m_s2: number[];
}

/** "denied": the person or the browser said no. "missing": no such sensor interface. */
export type Outcome = 'listening' | 'denied' | 'missing';

/** The first values come within a few tenths of a second where there is a sensor. */
export const SILENT_MS = 2000;
/** Twenty-five samples a second are plenty for a mast that swings once in seconds; more only costs calc's time. */
const APART_S = 0.039;
/** What is older than this goes: sixty seconds average any sway that is worth waiting for. */
const KEPT_S = 60;

type Asking = { requestPermission?: (absolute?: boolean) => Promise<string> };

export class Motion {
  private rows: [number, number, number, number][] = [];
  private from = 0;
  private listening = false;
  private heardAt: number | null = null;
  private awake: WakeLockSentinel | null = null;

  /**
   * Asks where asking is possible, and listens. Must be called in the tap itself: both questions are put before anything
   * is awaited.
   */
  async start(): Promise<Outcome> {
    if (typeof DeviceMotionEvent === 'undefined') return 'missing';
    const asked = [(DeviceMotionEvent as Asking).requestPermission?.(), typeof DeviceOrientationEvent === 'undefined' ? undefined : (DeviceOrientationEvent as Asking).requestPermission?.(true)];
    // Only motion is needed. The other is asked in the same tap so that nobody has to be asked twice.
    const [motion] = await Promise.allSettled(asked);
    if (motion?.status === 'rejected' || (motion?.status === 'fulfilled' && motion.value !== undefined && motion.value !== 'granted')) return 'denied';
    this.listening = true;
    addEventListener('devicemotion', this.take);
    this.keepAwake();
    return 'listening';
  }

  stop(): void {
    this.listening = false;
    removeEventListener('devicemotion', this.take);
    this.awake?.release().catch(() => undefined);
    this.awake = null;
    this.rows = [];
  }

  /** Whether a real value came within the last `ms`. An event with empty values, which browsers without a sensor send, is none. */
  heardWithin(ms: number): boolean {
    return this.heardAt !== null && performance.now() - this.heardAt <= ms;
  }

  /** Forgets what was gathered; samples of the first `wait_s` seconds, while a hand still lays the phone on, are not taken. */
  begin(wait_s: number): void {
    this.rows = [];
    this.from = wait_s;
  }

  /** What was gathered so far, its time from the first sample; null before there is any. */
  gathered(): Gathered | null {
    const first = this.rows[0]?.[0];
    if (first === undefined) return null;
    const taken = this.rows.filter(([t]) => t - first >= this.from);
    if (taken.length === 0) return null;
    return { t_s: taken.map((r) => r[0] - first), ax_m_s2: taken.map((r) => r[1]), ay_m_s2: taken.map((r) => r[2]), az_m_s2: taken.map((r) => r[3]) };
  }

  private readonly take = (event: DeviceMotionEvent): void => {
    const a = event.accelerationIncludingGravity;
    if (!this.listening || !a || a.x === null || a.y === null || a.z === null || !Number.isFinite(a.x + a.y + a.z)) return;
    this.heardAt = performance.now();
    const t = event.timeStamp / 1000;
    const last = this.rows[this.rows.length - 1];
    if (last && t < last[0] + APART_S) return;
    this.rows.push([t, a.x, a.y, a.z]);
    while (this.rows[0] && t - this.rows[0][0] > KEPT_S) {
      this.rows.shift();
      this.from = 0;
    }
  };

  /** A screen that goes dark stops the sensor. Where the phone cannot be kept awake, the person does it by a touch. */
  private keepAwake(): void {
    navigator.wakeLock?.request('screen').then(
      (lock) => {
        if (this.listening) this.awake = lock;
        else void lock.release();
      },
      () => undefined,
    );
  }
}
