// Entries of aim and radio figures in one line of words, for the log.

import type { Entry } from '../types.ts';
import { say } from '../words/aim.ts';
import { asGiven } from './format.ts';

export function aimSaid(entry: Entry): string | null {
  switch (entry.kind) {
    case 'level.stepped':
      return say('desk.said.step', { antenna: entry.body.antenna, axis: say(`axis.${entry.body.axis}`), angle: asGiven(entry.body.angle_deg, 'deg'), level: asGiven(entry.body.level_dbm, 'dBm') });
    case 'power_control.confirmed':
      return say('desk.said.control', { name: entry.body.name });
    case 'peak.fitted':
      return say('desk.said.peak', { antenna: entry.body.antenna, axis: say(`axis.${entry.body.axis}`) });
    case 'figures.read':
      return say('desk.said.figures', { end: say(`figures.end.${entry.body.end}`) });
    case 'sight.taken':
      return say('desk.said.sight', { antenna: entry.body.antenna, typed: entry.body.typed });
    case 'lean.read':
      return say('desk.said.lean', { typed: entry.body.typed });
    case 'obstacle.noted':
      return say('desk.said.obstacle', { name: entry.body.name ?? say('obstacle.unnamed'), at: asGiven(entry.body.at_m, 'm') });
    default:
      return null;
  }
}
