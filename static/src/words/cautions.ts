// The usual cautions, in the order in which a crew meets them. Each confirmation is logged with the version of the text
// that was on the screen: a change of wording is a new version. Wording to be reviewed by a safety professional.

export const cautions = ['height', 'weather', 'lightning', 'rf', 'electricity', 'sun'] as const;

export type Caution = (typeof cautions)[number];

export const cautionVersion: Record<Caution, number> = {
  height: 1,
  weather: 1,
  lightning: 1,
  rf: 1,
  electricity: 1,
  sun: 1,
};
