// Typing what one radio's own page shows: a level for each port, and what else it has. calc reads the whole before it is
// kept, so that a slip stands beside its figure.
import { useState } from 'preact/hooks';
import type { FaultRanking } from '../../aim/answers.ts';
import { portsOf } from '../../aim/questions.ts';
import { controlOff, standingOf } from '../../aim/search.ts';
import { useReckoned } from '../../aim/useReckoned.ts';
import { Button } from '../../parts/Button.tsx';
import { Choice } from '../../parts/Choice.tsx';
import { Message } from '../../parts/Message.tsx';
import { addEntry } from '../../store/index.ts';
import type { ChainFigures, RadioFigures, RadioPage } from '../../types.ts';
import { say } from '../../words/aim.ts';
import { t } from '../../words/words.ts';
import { Gone } from '../Gone.tsx';
import { Page } from '../Page.tsx';
import { go, hrefOf } from '../route.ts';
import { errorIn, Field, type Form, numberIn, showFirst, told, useForm } from './form.tsx';
import { PowerControl } from './PeakPage.tsx';
import { ask, type AimOpen, useAim } from './useAim.ts';

interface Address {
  job: string;
  mount: string;
  end: 'near' | 'far';
}

/** Figures of one port, in the order in which radios show them; those after the second are under "more". */
const perPort = [
  { name: 'level', field: 'level_dbm', unit: 'dBm' },
  { name: 'snr', field: 'snr_db', unit: 'dB' },
  { name: 'noise', field: 'noise_dbm', unit: 'dBm' },
  { name: 'xpi', field: 'xpi_db', unit: 'dB' },
  { name: 'swing', field: 'swing_db', unit: 'dB' },
  { name: 'return-loss', field: 'return_loss_db', unit: 'dB' },
] as const;

const perPage = [
  { name: 'streams', field: 'streams', unit: '' },
  { name: 'tx', field: 'tx_power_dbm', unit: 'dBm' },
  { name: 'frequency', field: 'frequency_mhz', unit: 'MHz' },
  { name: 'width', field: 'bandwidth_mhz', unit: 'MHz' },
] as const;

/** Bits per symbol of the usual modulations: 2 to the power of it is the count of states. */
const modulations = [1, 2, 4, 6, 8, 10, 12] as const;

const minus = '\u2212';

export function RadioPageEntry(props: Address) {
  const open = useAim(props.job, props.mount);
  const form = useForm(`figures ${props.job} ${props.mount} ${props.end}`, {}, '');
  if (!open) return <Gone looking={open === undefined} />;
  if (!form) return <p class="opening">{t('loading')}</p>;
  return <Typing {...props} open={open} form={form} />;
}

function Typing({ open, form, job: jobId, mount: mountId, end }: Address & { open: AimOpen; form: Form }) {
  const { sheet, mount, entries } = open;
  const [busy, setBusy] = useState(false);
  const ports = portsOf(sheet[end].antennas);
  const last = standingOf(entries, mountId, 'figures.read').filter((r) => r.body.end === end).pop();
  const page = pageOf(form, ports);
  const others: RadioFigures = { ...(sheet.radio_figures ?? {}) };
  const figures: RadioFigures = { ...others, [end]: page };
  const tried = useReckoned<FaultRanking>(ask, 'fault.rank', page && open.folded ? { ...sheet, radio_figures: figures } : null);
  const { problem } = tried;
  const at = `radio_figures.${end}`;
  // Where the sheet lacks a figure the ranking needs, or the plan's own is amiss, the page can still be kept.
  const mine = problem !== null && problem.field.startsWith(at);
  const index = (port: string) => page?.ports.findIndex((p) => p.port === port) ?? -1;
  const place = { job: jobId, mount: mountId };
  const numbers = [...ports.flatMap((port) => perPort.map((f) => `${f.name}-${port}`)), ...perPage.map((f) => f.name)];
  const unreadable = numbers.some((name) => errorIn(form, name, true) !== null);

  const keep = async () => {
    if (!page || unreadable || mine || tried.asking) {
      form.ask(true);
      requestAnimationFrame(() => showFirst(numbers));
      return;
    }
    setBusy(true);
    try {
      const typed = Object.fromEntries(numbers.filter((name) => form.text(name).trim() !== '').map((name) => [name, form.text(name)]));
      await addEntry('figures.read', jobId, mountId, { end, page, typed }, { dropsDraft: form.key });
      go({ page: 'figures', ...place });
    } catch (error) {
      form.fail(t('failed.write', { why: error instanceof Error ? error.message : String(error) }));
      setBusy(false);
    }
  };

  return (
    <Page
      title={say(`figures.end.${end}`)}
      under={mount.name}
      backHref={hrefOf({ page: 'figures', ...place })}
      dock={
        <>
          {form.trouble && (
            <Message tone="wrong" live>
              {form.trouble}
            </Message>
          )}
          {form.asked && !page && (
            <Message tone="wrong" live>
              {say('figures.nothing')}
            </Message>
          )}
          {form.asked && unreadable && (
            <Message tone="wrong" live>
              {say('figures.unreadable')}
            </Message>
          )}
          <Button kind="first" wide busy={busy} onPress={() => void keep()}>
            {say('figures.keep')}
          </Button>
        </>
      }
    >
      <PowerControl job={jobId} mount={mountId} off={controlOff(entries, mountId)} />
      <p>{say(`figures.whose.${end}`)}</p>
      {last && <Message tone="note">{say('figures.again')}</Message>}
      {ports.map((port) => {
        const deaf = form.text(`heard-${port}`) === 'no';
        const of = index(port);
        const field = ({ name, field: calcField, unit }: (typeof perPort)[number], always: boolean) => {
          const id = `${name}-${port}`;
          const value = numberIn(form, id);
          const signed = unit === 'dBm';
          return (
            <div key={id} class="stack">
              <Field form={form} name={id} label={say('figures.of-port', { port, figure: say(`figure.${name}`) })} unit={unit} optional={!always} problem={of >= 0 ? told(problem, `${at}.ports[${of}].${calcField}`) : null} />
              {signed && value !== null && value > 0 && (
                <Button wide onPress={() => form.put({ [id]: `${minus}${form.text(id).replace(/^[+\s]+/, '')}` })}>
                  {say('peak.minus', { level: `${minus}${form.text(id).replace(/^[+\s]+/, '')}` })}
                </Button>
              )}
            </div>
          );
        };
        return (
          <section class="section stack" key={port} aria-labelledby={`port-${port}`}>
            <h2 id={`port-${port}`}>{say('figures.port', { port })}</h2>
            <Choice
              legend={say('figures.heard')}
              name={`heard-${port}`}
              value={deaf ? 'no' : 'yes'}
              options={[
                { value: 'yes', label: say('figures.heard.yes') },
                { value: 'no', label: say('figures.heard.no') },
              ]}
              onChoose={(heard) => form.put({ [`heard-${port}`]: heard })}
            />
            {!deaf && (
              <>
                {field(perPort[0], true)}
                {field(perPort[1], false)}
                <details class="more-figures">
                  <summary>{say('figures.more')}</summary>
                  <div class="stack">{perPort.slice(2).map((f) => field(f, false))}</div>
                </details>
              </>
            )}
            {of >= 0 && told(problem, `${at}.ports[${of}].heard`, `${at}.ports[${of}].port`) && <Message tone="wrong">{problem?.message}</Message>}
          </section>
        );
      })}
      <section class="section stack" aria-labelledby="page-title">
        <h2 id="page-title">{say('figures.whole')}</h2>
        <Field form={form} name="streams" label={say('figure.streams')} unit="" unitSpoken="" optional problem={told(problem, `${at}.streams`)} />
        <Choice
          legend={say('figures.modulation')}
          name="modulation"
          value={form.text('modulation') || 'none'}
          options={[{ value: 'none', label: say('figures.modulation-none') }, ...modulations.map((bits) => ({ value: String(bits), label: modulationName(bits) }))]}
          onChoose={(modulation) => form.put({ modulation: modulation === 'none' ? '' : modulation })}
        />
        {told(problem, `${at}.modulation_bits`, `${at}.modulation_max_bits`) && <Message tone="wrong">{problem?.message}</Message>}
        <Choice
          legend={say('figures.peer')}
          name="peer"
          value={form.text('peer') || 'unknown'}
          options={[
            { value: 'yes', label: say('figures.peer.yes') },
            { value: 'no', label: say('figures.peer.no') },
            { value: 'unknown', label: say('figures.peer.unknown') },
          ]}
          onChoose={(peer) => form.put({ peer: peer === 'unknown' ? '' : peer })}
        />
        <details class="more-figures">
          <summary>{say('figures.set')}</summary>
          <div class="stack">
            {perPage.slice(1).map((f) => (
              <Field key={f.name} form={form} name={f.name} label={say(`figure.${f.name}`)} unit={f.unit} optional problem={told(problem, `${at}.${f.field}`)} />
            ))}
          </div>
        </details>
      </section>
      {problem && !mine && <Message tone="note">{problem.message}</Message>}
      {problem && mine && problem.field === at && <Message tone="wrong">{problem.message}</Message>}
    </Page>
  );
}

function modulationName(bits: number): string {
  if (bits === 1) return 'BPSK';
  if (bits === 2) return 'QPSK';
  return `${2 ** bits}-QAM`;
}

/** The page as typed; null while it holds nothing that calc could read. */
function pageOf(form: Form, ports: readonly string[]): RadioPage | null {
  const lines: ChainFigures[] = [];
  for (const port of ports) {
    if (form.text(`heard-${port}`) === 'no') {
      lines.push({ port, heard: false });
      continue;
    }
    const line: ChainFigures = { port };
    let any = false;
    for (const { name, field } of perPort) {
      const value = numberIn(form, `${name}-${port}`);
      if (value === null) continue;
      line[field] = value;
      any = true;
    }
    if (any) lines.push(line);
  }
  if (lines.length === 0) return null;
  const page: RadioPage = { ports: lines };
  for (const { name, field } of perPage) {
    const value = numberIn(form, name);
    if (value !== null) page[field] = value;
  }
  const bits = form.text('modulation');
  if (bits !== '') page.modulation_bits = Number(bits);
  const peer = form.text('peer');
  if (peer !== '') page.peer_as_planned = peer === 'yes';
  return page;
}
