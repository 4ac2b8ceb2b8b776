// Radio figures: what this link should show beside what the radios' pages show, and what may be wrong, likeliest first.
import { Message } from '../parts/Message.tsx';
import { say } from '../words/aim.ts';
import { figure, percent } from '../words/figures.ts';
import type { Candidate, FaultRanking, PredictedFigure } from './answers.ts';

/** Beyond this many standard uncertainties a figure counts as off what was predicted: once in 400 by chance. */
const offFrom = 3;

export function FiguresTable({ predicted, caption }: { predicted: readonly PredictedFigure[]; caption: string }) {
  return (
    <table class="compare-figures figure">
      <caption>{caption}</caption>
      <thead>
        <tr>
          <th scope="col">{say('figures.figure')}</th>
          <th scope="col" class="number">
            {say('figures.predicted')}
          </th>
          <th scope="col" class="number">
            {say('figures.read')}
          </th>
        </tr>
      </thead>
      <tbody>
        {predicted.map((p) => {
          const off = Math.abs(p.measured - p.predicted) > offFrom * p.u;
          const { unit, decimals } = mannerOf(p.figure);
          return (
            <tr key={`${p.end} ${p.port} ${p.figure}`}>
              <th scope="row">
                {p.port ? say('figures.of-port', { port: p.port, figure: figureName(p.figure) }) : figureName(p.figure)}
                {unit && `, ${unit}`}
                {off && <span class="off-mark">{say(p.measured < p.predicted ? 'figures.low' : 'figures.high')}</span>}
              </th>
              <td class="number">
                {figure(p.predicted, decimals)} ± {figure(p.u, p.u < 2 ? 1 : 0)}
              </td>
              <td class="number" data-off={off}>
                {figure(p.measured, decimals)}
              </td>
            </tr>
          );
        })}
      </tbody>
    </table>
  );
}

function mannerOf(name: string): { unit: string; decimals: number } {
  if (/level|noise/.test(name)) return { unit: 'dBm', decimals: 0 };
  if (/snr|xpi|swing|return/.test(name)) return { unit: 'dB', decimals: /swing/.test(name) ? 1 : 0 };
  return { unit: '', decimals: /stream/.test(name) ? 0 : 1 };
}

const names = {
  level_dbm: 'figure.level',
  snr_db: 'figure.snr',
  noise_dbm: 'figure.noise',
  xpi_db: 'figure.xpi',
  swing_db: 'figure.swing',
  return_loss_db: 'figure.return-loss',
  streams: 'figure.streams',
  modulation_bits: 'figure.modulation',
} as const;

export function figureName(name: string): string {
  const key = names[name as keyof typeof names];
  return key ? say(key) : name.replace(/_/g, ' ');
}

export function Candidates({ ranking }: { ranking: FaultRanking }) {
  const shown = ranking.candidates.filter((c, i) => i < 1 || c.odds >= 0.01).slice(0, 5);
  const [first] = shown;
  const shares = first ? shown.filter((c) => c !== first && first.cannot_tell_from.includes(c.name)) : [];
  return (
    <>
      {ranking.none_fits && <Message tone="warn">{say('fault.none-fits')}</Message>}
      {first && shares.length > 0 && <p>{sharedOdds([first, ...shares])}</p>}
      <ol class="candidates">
        {shown.map((c) => (
          <li key={c.name}>
            <span class="head figure">
              <strong>{candidateName(c)}</strong>
              <span>{say('fault.odds', { percent: percent(c.odds) })}</span>
            </span>
            <svg class="odds-bar" aria-hidden="true" focusable="false" height="12">
              <rect width={`${Math.max(1, 100 * c.odds).toFixed(1)}%`} height="100%" />
            </svg>
            <span>{c.text}</span>
            <Predicts candidate={c} />
            <span>
              <strong>{say('fault.next')}</strong> {c.check_next}
            </span>
          </li>
        ))}
      </ol>
      {ranking.remarks.map((remark) => (
        <p class="quiet" key={remark}>
          {remark}
        </p>
      ))}
    </>
  );
}

/** What cannot be told apart. That nothing stands out is no fault among others: then the figures fit a sound link as well. */
function sharedOdds(alike: readonly Candidate[]): string {
  const faults = alike.filter((c) => c.name !== 'nothing_stands_out');
  const names = faults.map(candidateName).join(', ');
  return say(faults.length < alike.length ? 'fault.share-sound' : 'fault.share', { names });
}

function Predicts({ candidate }: { candidate: Candidate }) {
  if (candidate.predicts.length === 0) return null;
  return (
    <details class="predicts">
      <summary>{say('fault.predicts')}</summary>
      {(['near', 'far'] as const).map((end) => {
        const of = candidate.predicts.filter((p) => p.end === end);
        return of.length === 0 ? null : <FiguresTable key={end} predicted={of} caption={say(`figures.end.${end}`)} />;
      })}
    </details>
  );
}

export function candidateName(c: Candidate): string {
  const known = candidateNames.find((code) => code === c.code);
  const name = known ? say(`fault.${known}`) : c.code.replace(/_/g, ' ');
  const of = c.port ? say('fault.of-port', { name, port: c.port }) : name;
  return c.end ? say(`fault.at-${c.end}`, { name: of }) : of;
}

const candidateNames = [
  'nothing_stands_out',
  'side_lobe',
  'ports_swapped',
  'feeder_lossy',
  'feeder_open',
  'feeder_wet',
  'feeder_intermittent',
  'pair_skewed',
  'path_obstructed',
  'wrong_far_antenna',
  'chains_out_of_balance',
  'interference',
  'wrong_power',
  'wrong_channel',
  'wrong_width',
] as const;
