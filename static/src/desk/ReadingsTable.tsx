// Who read what, when, with which instrument, exactly as typed. A reading that no longer counts is struck through and
// says why: nothing that was ever read is hidden.

import type { Offsets, Quantity, Reading, Sheet } from '../types';
import { asGiven, placeTime } from './format';
import type { JobRecord, MoveLine, ReadingLine } from './record';
import { t } from './words';

interface Props {
  mount: string;
  sheet: Sheet;
  record: JobRecord;
}

const quantities: readonly Quantity[] = ['position', 'azimuth', 'tilt', 'skew'];

export function ReadingsTable({ mount, sheet, record }: Props) {
  // Rods: their tilt is a lean forward or back.
  const rods = sheet.near.antennas.filter((a) => a.pattern.kind === 'omni' || a.pattern.kind === 'dipole').map((a) => a.id);
  const readings = record.readings.filter((r) => r.mount === mount);
  const moves = record.moves.filter((m) => m.mount === mount);
  if (readings.length === 0 && moves.length === 0) {
    return (
      <section class="readings">
        <h3>{t('desk.readings')}</h3>
        <p class="empty">{t('desk.readings.none')}</p>
      </section>
    );
  }
  return (
    <section class="readings">
      <h3>{t('desk.readings')}</h3>
      <table>
        <thead>
          <tr>
            <th scope="col">{t('desk.readings.part')}</th>
            <th scope="col" class="number">
              {t('desk.readings.value')}
            </th>
            <th scope="col" class="number">
              {t('desk.readings.u')}
            </th>
            <th scope="col" class="as-typed">
              {t('desk.readings.typed')}
            </th>
            <th scope="col">{t('desk.readings.with')}</th>
            <th scope="col">{t('desk.readings.by')}</th>
            <th scope="col">{t('desk.readings.at')}</th>
          </tr>
        </thead>
        {(['as_found', 'as_left'] as const).map((phase) => {
          const lines = ordered(
            readings.filter((r) => r.phase === phase),
            phase === 'as_left' ? moves : [],
          );
          return lines.length === 0 ? null : (
            <tbody key={phase}>
              <tr class="phase">
                <th scope="rowgroup" colSpan={7}>
                  {t(`desk.state.${phase}`)}
                </th>
              </tr>
              {lines.map((line) =>
                'reading' in line ? <ReadingRow key={line.id} line={line} rod={rods.includes(line.antenna)} /> : <MoveRow key={line.id} line={line} />,
              )}
            </tbody>
          );
        })}
      </table>
    </section>
  );
}

/** By antenna and quantity, then as the log has them. */
function ordered(readings: ReadingLine[], moves: MoveLine[]): (ReadingLine | MoveLine)[] {
  return [...readings, ...moves].sort(
    (a, b) =>
      a.antenna.localeCompare(b.antenna) ||
      quantities.indexOf(a.quantity) - quantities.indexOf(b.quantity) ||
      a.seq - b.seq,
  );
}

function ReadingRow({ line, rod }: { line: ReadingLine; rod: boolean }) {
  const { reading, standing } = line;
  const used = standing.is === 'used';
  const why = used
    ? null
    : t(standing.is === 'withdrawn' ? 'desk.readings.withdrawn' : 'desk.readings.moved-since', {
        name: standing.by,
        when: placeTime(standing.at),
      });
  const struck = (text: string) => (used ? text : <s>{text}</s>);
  return (
    <tr data-used={used}>
      <th scope="row">
        {line.antenna} {t(`quantity.${line.quantity}`)}
      </th>
      <td class="number" data-label={t('desk.readings.value')}>
        {struck(line.quantity === 'tilt' ? tiltText(reading, rod) : valueText(reading))}
      </td>
      <td class="number" data-label={t('desk.readings.u')}>
        {reading.u == null ? t('desk.readings.no-u') : struck(`±\u00a0${asGiven(reading.u, reading.unit)}`)}
      </td>
      <td class="as-typed" data-label={t('desk.readings.typed')}>
        <span class="typed">{struck(line.typed)}</span>
      </td>
      <td data-label={t('desk.readings.with')}>{[reading.method, reading.instrument].filter(Boolean).join(', ')}</td>
      <td data-label={t('desk.readings.by')}>{line.by}</td>
      <td data-label={t('desk.readings.at')}>
        {placeTime(line.at)}
        {why !== null && <span class="why">{why}</span>}
      </td>
    </tr>
  );
}

function MoveRow({ line }: { line: MoveLine }) {
  return (
    <tr class="moved">
      <th scope="row">
        {line.antenna} {t(`quantity.${line.quantity}`)}
      </th>
      <td colSpan={4}>{t('desk.readings.bolt')}</td>
      <td data-label={t('desk.readings.by')}>{line.by}</td>
      <td data-label={t('desk.readings.at')}>{placeTime(line.at)}</td>
    </tr>
  );
}

/** "0.4° down": the way in words, as the phone says it; a sign is read over. */
function tiltText(reading: Reading, rod: boolean): string {
  const { value } = reading;
  if (typeof value !== 'number' || value === 0) return valueText(reading);
  const way = t(`reading.way.${rod ? 'tilt-omni' : 'tilt'}.${value > 0 ? 'more' : 'less'}`);
  return `${asGiven(Math.abs(value), reading.unit)} ${way}`;
}

function valueText(reading: Reading): string {
  if (typeof reading.value === 'number') {
    const value = asGiven(reading.value, reading.unit);
    return reading.north && reading.north !== 'true' ? `${value} ${reading.north}` : value;
  }
  const offsets: Offsets = reading.value;
  return (['right', 'up', 'forward'] as const)
    .filter((axis) => offsets[axis] !== null && offsets[axis] !== undefined)
    .map((axis) => `${t(`desk.axis.${axis}`)}\u00a0${asGiven(offsets[axis] ?? 0, 'mm')}`)
    .join(', ');
}
