// English texts of the phone, and of the parts and drawings that phone and desk share. The desk's own stand in a file of
// their own, so that the phone does not carry them. Trade words only, or plain ones; a sentence holds its values as {name}.

export const en = {
  // ---- Verdict ----
  'word.go': 'GO',
  'word.no-go': 'NO-GO',
  'word.measure again': 'MEASURE AGAIN',

  // ---- Limits, and how they stand ----
  'limit.effective_streams': 'Effective streams',
  'limit.rate_share': 'Share of planned rate',
  'limit.envelope_correlation': 'Envelope correlation',
  'limit.pointing_loss_db': 'Pointing loss',
  'limit.crosstalk_db': 'Cross-talk, port to port',
  'limit.chain_imbalance_db': 'Chain imbalance',
  'limit.pair_angle_error_deg': 'Pair out of square',
  'limit.skew_deviation_deg': 'Skew off plan',
  'limit.tilt_deviation_deg': 'Tilt off plan',
  'limit.azimuth_deviation_deg': 'Azimuth off plan',
  'limit.position_deviation_mm': 'Place off plan',
  'limit.at-least': 'at least {limit}',
  'limit.at-most': 'at most {limit}',
  'limit.not-judged': 'not judged',
  'standing.met': 'met',
  'standing.missed': 'missed',
  'standing.unsure': 'unsure',

  // ---- Quantities, directions, turns ----
  'quantity.skew': 'skew',
  'quantity.tilt': 'tilt',
  'quantity.azimuth': 'azimuth',
  'quantity.position': 'place',
  'way.clockwise': 'clockwise',
  'way.anticlockwise': 'anticlockwise',
  'way.up': 'up',
  'way.down': 'down',
  'way.right': 'right',
  'way.left': 'left',
  'way.forward': 'forward',
  'way.back': 'back',
  'way.farther': 'farther apart',
  'way.nearer': 'nearer together',
  'turn.amount': '{amount} {way}',
  'turn.skew': 'Turn {antenna} {amount} {way}',
  'turn.tilt': 'Tilt {antenna} {amount} {way}',
  'turn.azimuth': 'Swing {antenna} {amount} {way}',
  'turn.position': 'Move {antenna} {amount} {way}',

  // ---- The drawing ----
  'drawing.from-behind': 'seen from behind',
  'drawing.touch': 'touch to measure',
  'drawing.antenna': 'antenna {antenna}',
  'drawing.off': 'off: {quantities}',
  'drawing.measure': 'Measure {what}',
  'drawing.unsized': 'No size given for {antennas}: drawn in a usual size.',
  'reading.none': 'not read yet',

  // ---- Parts ----
  back: 'Back',
  'keypad.name': 'Keys',
  'keypad.comma': 'decimal comma',
  'keypad.point': 'decimal point',
  'keypad.rub': 'rub out',
  'path.name': 'Path of the visit',
  'path.done': 'done',
  'path.open': 'open',
} as const;
