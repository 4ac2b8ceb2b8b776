// The shapes that phone, desk, store, sync and calc share. The mount sheet and the entries are the server's and calc's
// own JSON; a field is named here exactly as it is on the wire.

// ---- Mount sheet -------------------------------------------------------------------------------------------------

/** The four things that hold an antenna, each with its bolt. */
export type Quantity = 'position' | 'azimuth' | 'tilt' | 'skew';

/** The three states that a mount is looked at in. */
export type State = 'planned' | 'as_found' | 'as_left';

/** The two states that a reading can be taken in. */
export type Phase = 'as_found' | 'as_left';

/** Position in the mount's own frame as seen from behind, millimetres. In a reading, null = this axis was not measured. */
export interface Offsets {
  right: number | null;
  up: number | null;
  forward: number | null;
}

export interface Reading<V = number | Offsets> {
  value: V;
  unit: 'deg' | 'mm';
  /** Standard uncertainty, in the same unit; absent or 0 for a planned value. */
  u?: number | null;
  /** "level", "phone", "tape", "compass", "sun", "landmark", "plan", "typed" or free short text. */
  method?: string | null;
  instrument?: string | null;
  /** RFC 3339 with the offset of the place. */
  at?: string | null;
  by?: string | null;
  /** Azimuth readings only: which north the value counts from. Only "true" can be judged. */
  north?: string | null;
}

export type AngleReading = Reading<number>;
export type PositionReading = Reading<Offsets>;

/** A single reading may stand where a list stands. */
export interface States<R> {
  planned: R | null;
  as_found?: R | R[] | null;
  as_left?: R | R[] | null;
}

export interface Element {
  port: string;
  slant_deg: number;
  offset_mm?: Offsets | null;
  xpd_db?: number | null;
  axial_ratio_db?: number | null;
  hand?: 'right' | 'left' | null;
}

export interface Pattern {
  kind: 'isotropic' | 'panel' | 'omni' | 'dipole' | 'dish' | 'cuts';
  gain_dbi?: number | null;
  beamwidth_az_deg?: number | null;
  beamwidth_el_deg?: number | null;
  front_to_back_db?: number | null;
  sidelobe_db?: number | null;
  diameter_m?: number | null;
  cuts?: unknown;
}

export interface Antenna {
  id: string;
  pattern: Pattern;
  size_mm?: { width: number; height: number } | null;
  electrical_tilt_deg?: number | null;
  level_datum?: { surface: string; skew_offset_deg: number; tilt_offset_deg: number } | null;
  elements: Element[];
  position_mm: States<PositionReading>;
  azimuth?: States<AngleReading> | null;
  tilt: States<AngleReading>;
  skew: States<AngleReading>;
}

export interface Radio {
  frequency_mhz: number;
  bandwidth_mhz: number;
  combining: boolean;
  power: 'per-chain' | 'shared';
  tx_power_dbm: number[];
  noise_figure_db: number;
  snr_db?: number | null;
  links?: { near: string; far: string }[] | null;
}

export interface AngleSpreads {
  azimuth_deg: number;
  elevation_deg: number;
}

export interface Reflector {
  name: string;
  bearing_deg: number;
  distance_m: number;
  height_m: number;
  amplitude_db: number;
}

/** Exactly one of class, spreads and reflectors is given. */
export interface Surroundings {
  sight: boolean;
  class?: { standard: string; edition: string; scenario: 'RMa' | 'UMa' | 'UMi' | 'InH'; mast_end: 'near' | 'far' } | null;
  spreads?: { near: AngleSpreads; far: AngleSpreads; k_db: number | null; xpr_db: number; spectrum: string } | null;
  reflectors?: Reflector[] | null;
}

export type LimitName =
  | 'effective_streams'
  | 'rate_share'
  | 'envelope_correlation'
  | 'pointing_loss_db'
  | 'crosstalk_db'
  | 'chain_imbalance_db'
  | 'pair_angle_error_deg'
  | 'skew_deviation_deg'
  | 'tilt_deviation_deg'
  | 'azimuth_deviation_deg'
  | 'position_deviation_mm';

/** One of at_least and at_most is given. */
export interface Limit {
  name: LimitName;
  at_least?: number | null;
  at_most?: number | null;
  reason?: string | null;
}

/** A surveyed point; the height is above the path's height datum. */
export interface Place {
  lat_deg: number;
  lon_deg: number;
  height_m: number;
  /** Standard uncertainty in each of east and north. */
  u_m?: number | null;
}

export interface Landmark extends Place {
  name: string;
}

export interface Obstacle {
  name?: string | null;
  /** From the near end, along the ground. */
  at_m: number;
  top_m: number;
  u_m?: number | null;
}

export interface Path {
  bearing_deg: number;
  elevation_deg: number;
  distance_m: number;
  near_at?: Place | null;
  far_at?: Place | null;
  height_datum?: string | null;
  k_factor?: number | null;
  above_ground_m?: number | null;
  obstacles?: Obstacle[] | null;
}

/** One port's line on a radio's own page. */
export interface ChainFigures {
  port: string;
  heard?: boolean;
  level_dbm?: number | null;
  noise_dbm?: number | null;
  snr_db?: number | null;
  xpi_db?: number | null;
  swing_db?: number | null;
  return_loss_db?: number | null;
}

/** What one radio's own page shows. */
export interface RadioPage {
  ports: ChainFigures[];
  streams?: number | null;
  modulation_bits?: number | null;
  modulation_max_bits?: number | null;
  peer_as_planned?: boolean | null;
  frequency_mhz?: number | null;
  bandwidth_mhz?: number | null;
  tx_power_dbm?: number | null;
}

export interface RadioFigures {
  power_control_off?: boolean | null;
  expected_level_dbm?: number | null;
  expected_u_db?: number | null;
  near?: RadioPage | null;
  far?: RadioPage | null;
}

export interface Sheet {
  sheet: 1;
  title: string;
  radio: Radio;
  near: { antennas: Antenna[] };
  far: { antennas: Antenna[] };
  path: Path;
  surroundings: Surroundings;
  landmarks?: Landmark[] | null;
  radio_figures?: RadioFigures | null;
  limits: Limit[];
}

// ---- Verdict -----------------------------------------------------------------------------------------------------

export type Word = 'go' | 'no-go' | 'measure again';

export type ReasonCode = 'limit_missed' | 'all_met' | 'doubt' | 'missing_reading' | 'surroundings_decide';

export interface Method {
  version: string;
  sources: string[];
}

/** A limit beside what the mount gives: value with its doubt, and the 2.5 % and 97.5 % points. */
export interface LimitOutcome {
  name: LimitName;
  sense: 'at least' | 'at most';
  limit: number;
  unit: string;
  value: number | null;
  u: number | null;
  low: number | null;
  high: number | null;
  margin: number | null;
  probability: number | null;
  applicable: boolean;
  why_not: string | null;
}

export interface Remedy {
  antenna: string;
  quantity: Quantity;
  /** Of a position: which axis. */
  axis?: 'right' | 'up' | 'forward' | null;
  change: number;
  unit: 'deg' | 'mm';
  direction: string;
  text: string;
  limit: LimitName | null;
  from: number | null;
  to: number | null;
  word_after: Word;
  probability_after: number;
}

export interface PlacedAntenna {
  right_mm: number;
  up_mm: number;
  forward_mm: number;
  azimuth_deg: number;
  tilt_deg: number;
  skew_deg: number;
  u_right_mm?: number | null;
  u_up_mm?: number | null;
  u_forward_mm?: number | null;
  u_azimuth_deg?: number | null;
  u_tilt_deg?: number | null;
  u_skew_deg?: number | null;
}

export interface Geometry {
  antennas: {
    id: string;
    planned: PlacedAntenna;
    as_found: PlacedAntenna | null;
    as_left: PlacedAntenna | null;
  }[];
  wavelength_mm: number;
  spacings: { from: string; to: string; mm: number; wavelengths: number }[];
}

export interface StateOutcome {
  word: Word;
  probability: number;
  limits: LimitOutcome[];
}

export interface Verdict {
  word: Word;
  probability: number;
  judged: State;
  reason: {
    code: ReasonCode;
    limit: LimitName | null;
    antenna: string | null;
    quantity: Quantity | null;
    text: string;
  };
  deciding: { antenna: string; quantity: Quantity; unit: 'deg' | 'mm'; u: number; u_needed: number | null } | null;
  limits: LimitOutcome[];
  remedies: Remedy[];
  missing: { antenna: string; quantity: Quantity; why?: 'not read' | 'compass only' }[];
  states: {
    planned: { values: { name: LimitName; value: number | null }[] };
    as_found: StateOutcome | null;
    as_left: StateOutcome | null;
  };
  geometry: Geometry;
  far_from_plan: boolean;
  surroundings: { text: string; sight: boolean };
  not_judged: { limit: LimitName; why: string }[];
  method: Method;
}

/** What calc answers when it cannot: field is a path like `near.antennas[1].skew.as_left[0].value`. */
export interface Problem {
  code: string;
  field: string;
  message: string;
}

// ---- The log of entries ------------------------------------------------------------------------------------------

export interface Plan {
  site: string;
  title: string;
  crew: string;
  visit_on: string | null;
  access: string | null;
  emergency: string | null;
  lat_deg: number | null;
  lon_deg: number | null;
  mounts: PlannedMount[];
}

export interface PlannedMount {
  id: string;
  name: string;
  sheet: Sheet;
}

/** Entry bodies by kind, schema 1. */
export interface Bodies {
  'job.planned': Plan;
  'job.issued': Record<string, never>;
  'caution.confirmed': { caution: string; version: number; name: string };
  'reading.taken': { phase: Phase; antenna: string; quantity: Quantity; reading: Reading; typed: string };
  'reading.withdrawn': { withdraws: string };
  'bolt.moved': { antenna: string; quantity: Quantity };
  'note.added': { text: string };
  'job.handed_in': {
    remark: string | null;
    open: string[];
    verdicts: { mount: string; phase: State; word: Word; probability: number; method: Method }[];
  };
  'job.sent_back': { remark: string; base_seq: number };
  'job.signed_off': { remark: string | null; base_seq: number };
  'level.stepped': { antenna: string; axis: 'azimuth' | 'tilt'; search: number; angle_deg: number; level_dbm: number; typed: string };
  'power_control.confirmed': { name: string };
  'peak.fitted': { antenna: string; axis: 'azimuth' | 'tilt'; search: number; answer: Record<string, unknown> };
  'figures.read': { end: 'near' | 'far'; page: RadioPage; typed: Record<string, string> };
  'sight.taken': {
    antenna: string;
    phase: Phase;
    reference: 'sun' | 'landmark' | 'compass';
    landmark: string | null;
    asked: Record<string, unknown>;
    answer: Record<string, unknown>;
    typed: string;
  };
  'lean.read': { asked: Record<string, unknown>; answer: Record<string, unknown>; typed: string };
  'obstacle.noted': Obstacle;
}

export type Kind = keyof Bodies;

/** An entry as it is written: the JSON text of this, made once on the device, is what is kept, hashed and sent. */
export interface EntryOf<K extends Kind> {
  id: string;
  device: string;
  /** 1, 2, 3 … on this device, without gaps. The order of a device's entries; clocks are not. */
  device_seq: number;
  /** Hash of this device's entry before, "" for the first. */
  prev: string;
  job: string | null;
  mount: string | null;
  kind: K;
  schema: 1;
  /** RFC 3339, local time with its offset. */
  at: string;
  /** Milliseconds since the page began, from a clock that nobody sets. */
  mono_ms: number;
  author: string;
  app: string;
  body: Bodies[K];
}

export type Entry = { [K in Kind]: EntryOf<K> }[Kind];

/** Where an entry stands: only here, on the server, or set apart by the server for a person to look at. */
export type Whereabouts = 'waiting' | 'safe' | 'needs person';

/** An entry on this phone, own or from the server. */
export interface LoggedEntry {
  entry: Entry;
  raw: string;
  hash: string;
  /** Made on this device by the person who is signed in now. */
  own: boolean;
  whereabouts: Whereabouts;
  /** Server sequence; null until the server has it. */
  seq: number | null;
  /** Why the server set it apart, else null. */
  reason: string | null;
  author_name: string | null;
  received_at: string | null;
}

// ---- Jobs --------------------------------------------------------------------------------------------------------

export type Stage = 'drafted' | 'issued' | 'under way' | 'handed in' | 'signed off' | 'sent back';

export interface JobSummary {
  id: string;
  site: string;
  title: string;
  crew: string;
  stage: Stage;
  stage_seq: number;
  visit_on: string | null;
  mounts: { id: string; name: string }[];
  head_seq: number;
  entries: number;
  remark: string | null;
  handed_in_at: string | null;
  /** Word of each mount by its id, where the server has one. */
  words: Record<string, Word>;
}

export interface ServerEntry {
  seq: number;
  received_at: string;
  author_name: string;
  /** Who was signed in on the device that sent it. */
  uploader_name: string;
  raw: string;
}

/** GET /api/jobs/:id */
export interface JobPage {
  job: JobSummary;
  plan: Plan;
  entries: ServerEntry[];
  mounts: {
    id: string;
    name: string;
    sheet: Sheet;
    verdict: Verdict | null;
    problem: Problem | null;
  }[];
  quarantined: number;
}

/** A job as this phone holds it, for the views. */
export interface PhoneJob {
  summary: JobSummary;
  plan: Plan;
  /** The stage with this phone's own waiting entries counted in. */
  stage: Stage;
  /** The desk's remark when the job was sent back or signed off, else null. */
  remark: string | null;
  /** Own entries of this job that the server does not have yet. */
  waiting: number;
  /** When the server last told this phone about the job. */
  pulledAt: string;
}

export type Role = 'climber' | 'supervisor';

export interface User {
  id: string;
  name: string;
  role: Role;
  crew: string | null;
}

export interface Session {
  user: User;
  until: string;
}

export interface QuarantinedEntry {
  id: string;
  job: string | null;
  reason: string;
  received_at: string;
  author_name: string | null;
  raw: string;
}

export interface Person {
  id: string;
  name: string;
  role: Role;
  crew: string | null;
}

// ---- State of the phone ------------------------------------------------------------------------------------------

export interface Counts {
  waiting: number;
  safe: number;
  needsPerson: number;
}

export type SyncState =
  /** Everything that was made here is on the server. */
  | 'up to date'
  /** A request is under way, or about to be. */
  | 'sending'
  /** Something waits, or the last try found no server: it will be tried again. */
  | 'no coverage'
  /** The server wants a sign-in; what waits is kept. */
  | 'sign in'
  /** Not tried yet since the page opened. */
  | 'starting';

export interface SyncStatus {
  state: SyncState;
  waiting: number;
  lastAnswerAt: string | null;
  signedIn: boolean;
}

export type StorageProtection = 'protected' | 'not protected' | 'unknown';
