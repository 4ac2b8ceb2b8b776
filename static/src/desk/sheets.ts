// Starting points for a mount sheet, so that nobody has to write one from nothing. Every figure can be changed in the
// form or in the text; the figures of antennas and radio are placeholders of a usual size, to be replaced by those of
// the data sheet. The defaults of the limits carry their reason.

import type { Antenna, Element, Limit, LimitName, Pattern, Sheet } from '../types';

export type Template = 'crossed pair' | 'two omnis apart' | 'two crossed panels';

export const templates: readonly Template[] = ['crossed pair', 'two omnis apart', 'two crossed panels'];

const crossedPanel: Pattern = {
  kind: 'panel',
  gain_dbi: 17,
  beamwidth_az_deg: 65,
  beamwidth_el_deg: 8,
  front_to_back_db: 25,
  sidelobe_db: 18,
};

const omni: Pattern = { kind: 'omni', gain_dbi: 8, beamwidth_el_deg: 15 };

/** Two ports at ±45°: the usual crossed antenna (3GPP TR 38.901, 7.3, has the same pair as its model). */
function crossed(first: number): Element[] {
  return [
    { port: String(first), slant_deg: 45, xpd_db: 30 },
    { port: String(first + 1), slant_deg: -45, xpd_db: 30 },
  ];
}

interface Body {
  id: string;
  pattern: Pattern;
  size: { width: number; height: number };
  elements: Element[];
  right: number;
  bearing: number;
  elevation: number;
}

function antenna(body: Body): Antenna {
  const turns = body.pattern.kind !== 'omni';
  return {
    id: body.id,
    pattern: { ...body.pattern },
    size_mm: body.size,
    electrical_tilt_deg: 0,
    level_datum: null,
    elements: body.elements,
    position_mm: { planned: { value: { right: body.right, up: 0, forward: 0 }, unit: 'mm' } },
    ...(turns ? { azimuth: { planned: { value: body.bearing, unit: 'deg', north: 'true' } } } : {}),
    // An omni hangs plumb; what has a beam is planned to look along the path.
    tilt: { planned: { value: turns ? body.elevation : 0, unit: 'deg' } },
    skew: { planned: { value: 0, unit: 'deg' } },
  };
}

function mount(template: Template, bearing: number, elevation: number, spacing: number): Antenna[] {
  const at = { bearing, elevation };
  const panel = { pattern: crossedPanel, size: { width: 300, height: 600 } };
  switch (template) {
    case 'crossed pair':
      return [antenna({ id: 'A', ...panel, elements: crossed(1), right: 0, ...at })];
    case 'two omnis apart': {
      const stick = { pattern: omni, size: { width: 60, height: 800 } };
      return [
        antenna({ id: 'A', ...stick, elements: [{ port: '1', slant_deg: 0 }], right: 0, ...at }),
        antenna({ id: 'B', ...stick, elements: [{ port: '2', slant_deg: 0 }], right: spacing, ...at }),
      ];
    }
    case 'two crossed panels':
      return [
        antenna({ id: 'A', ...panel, elements: crossed(1), right: 0, ...at }),
        antenna({ id: 'B', ...panel, elements: crossed(3), right: spacing, ...at }),
      ];
  }
}

/** Limits with the reason that each stands for where the job gives none of its own. */
export const usualLimits = {
  rate_share: {
    name: 'rate_share',
    at_least: 0.9,
    reason: 'at most a tenth of the planned rate lost to the mounting (usual, change as the job needs)',
  },
  envelope_correlation: {
    name: 'envelope_correlation',
    at_most: 0.5,
    reason: 'common practice: up to 0.5 two chains lose little',
  },
  pointing_loss_db: {
    name: 'pointing_loss_db',
    at_most: 1,
    reason: 'a usual allowance for mounting; the link budget decides',
  },
  crosstalk_db: {
    name: 'crosstalk_db',
    // Two ends of 30 dB cross-polar discrimination leave 27 dB at best: 25 dB asked would be out of reach while the far end is
    // not read. −25 dB of noise and −20 dB of cross-talk add up to −18.8 dB.
    at_least: 20,
    reason: 'leaves 18.8 of a 25 dB link where the radio ties port to port; its data sheet decides',
  },
} as const satisfies Partial<Record<LimitName, Limit>>;

/** What a mount is asked by default. A job's own figures replace these. */
function limitsOf(template: Template): Limit[] {
  const { rate_share, envelope_correlation, pointing_loss_db, crosstalk_db } = usualLimits;
  const streams = (least: number, ports: string): Limit => ({
    name: 'effective_streams',
    at_least: least,
    reason: `the ${ports} ports are to carry streams of their own (usual, change as the job needs)`,
  });
  switch (template) {
    case 'crossed pair':
      // One place, two polarizations: no correlation to ask for.
      return [{ ...crosstalk_db }, streams(1.7, 'two'), { ...rate_share }, { ...pointing_loss_db }];
    case 'two omnis apart':
      return [streams(1.5, 'two'), { ...rate_share }, { ...envelope_correlation }, { ...pointing_loss_db }];
    case 'two crossed panels':
      return [streams(3.2, 'four'), { ...rate_share }, { ...envelope_correlation }, { ...pointing_loss_db }];
  }
}

/**
 * What only the place can tell: empty until it is typed, for a figure put in here would be issued by somebody in a hurry.
 * A draft is JSON that may lack anything; the server judges none that lacks this.
 */
const notYet = null as unknown as number;

export function sheetFrom(template: Template): Sheet {
  const path = { bearing_deg: notYet, elevation_deg: 0, distance_m: notYet };
  // Two like antennas at a distance hear each other's ports alike: only a radio that combines its chains can part them.
  const combining = template !== 'crossed pair';
  const spacing = template === 'two omnis apart' ? 1000 : 500;
  return {
    sheet: 1,
    title: '',
    radio: {
      frequency_mhz: 5800,
      bandwidth_mhz: 40,
      combining,
      power: 'per-chain',
      tx_power_dbm: [20],
      noise_figure_db: 6,
      snr_db: null,
      links: null,
    },
    near: { antennas: mount(template, path.bearing_deg, 0, spacing) },
    far: { antennas: mount(template, path.bearing_deg, 0, spacing) },
    path,
    surroundings: {
      sight: true,
      // Between two masts no published class fits: typed spreads, to be replaced by what is known of the place.
      spreads: {
        near: { azimuth_deg: 8, elevation_deg: 2 },
        far: { azimuth_deg: 8, elevation_deg: 2 },
        k_db: 7,
        xpr_db: 9,
        spectrum: 'laplacian',
      },
    },
    radio_figures: null,
    limits: limitsOf(template),
  };
}

/** The text of a sheet as the form keeps it. */
export function sheetText(sheet: Sheet): string {
  return JSON.stringify(sheet, null, 2);
}

/** The sheet in a text, as far as the form needs it: an object with its main parts. The server checks all the rest. */
export function sheetIn(text: string): Sheet | null {
  try {
    const parsed = JSON.parse(text) as Partial<Sheet> | null;
    const whole =
      typeof parsed === 'object' &&
      parsed !== null &&
      typeof parsed.radio === 'object' &&
      typeof parsed.path === 'object' &&
      typeof parsed.surroundings === 'object' &&
      Array.isArray(parsed.near?.antennas) &&
      Array.isArray(parsed.far?.antennas);
    return whole ? (parsed as Sheet) : null;
  } catch {
    return null;
  }
}

/** 360° is 0°. */
const turned = (bearing: number | null) => (bearing === null ? null : bearing % 360);

/** The way back; of a bearing that is not known there is none. */
const back = (bearing: number | null) => (bearing === null ? null : (bearing + 180) % 360);

/**
 * A change of the path turns what was planned to look along it; an antenna aimed elsewhere on purpose stays. Without a
 * bearing (null) what looked along the path has no azimuth either, until there is one again.
 */
export function repath(sheet: Sheet, bearing: number | null, elevation: number): void {
  const old = sheet.path;
  const was: number | null = old.bearing_deg ?? null;
  const ends = [
    { antennas: sheet.near.antennas, was, is: bearing, up: 1 },
    { antennas: sheet.far.antennas, was: back(was), is: back(bearing), up: -1 },
  ];
  for (const end of ends) {
    for (const a of end.antennas) {
      const azimuth = a.azimuth?.planned;
      if (azimuth && turned(azimuth.value ?? null) === turned(end.was)) azimuth.value = end.is ?? notYet;
      const tilt = a.tilt.planned;
      const turns = a.azimuth != null;
      if (turns && tilt && tilt.value === end.up * old.elevation_deg) tilt.value = end.up * elevation || 0;
    }
  }
  sheet.path = { ...old, bearing_deg: bearing ?? notYet, elevation_deg: elevation };
}
