// Issuing a job: the visit, then each mount with its sheet. Nothing is sent before every mount can be judged.

import { useEffect, useLayoutEffect, useRef, useState } from 'preact/hooks';
import { Button } from '../parts/Button';
import { Message } from '../parts/Message';
import { readNumber } from '../parts/number';
import type { JobSummary } from '../types';
import * as api from './api';
import { dropDraft, type JobDraft, keepDraft, keptDraft, newDraft, newMount } from './draft';
import { MountForm } from './MountForm';
import { crewAsKnown, crewName } from './names';
import { hrefOf } from './route';
import { sheetIn } from './sheets';
import { TextField } from './TextField';
import { t } from './words';

interface Props {
  jobs: JobSummary[] | null;
  onIssued: () => void;
}

type TextPart = 'site' | 'title' | 'crew' | 'visit_on' | 'access' | 'emergency' | 'lat' | 'lon';

export function PlanPage({ jobs, onIssued }: Props) {
  const [draft, setDraft] = useState<JobDraft>(() => keptDraft() ?? newDraft());
  // Mounts whose sheet the server could judge as it now stands.
  const [fit, setFit] = useState<Record<string, boolean>>({});
  const [asked, setAsked] = useState(false);
  const [busy, setBusy] = useState(false);
  const [problem, setProblem] = useState<{ field: string; text: string } | null>(null);
  const [issued, setIssued] = useState<JobDraft | null>(null);
  const form = useRef<HTMLFormElement>(null);
  // Counts the presses that were refused, here or by the server.
  const [refused, setRefused] = useState(0);

  // At once, not after the next picture: the tab may be closed right after the last letter.
  useLayoutEffect(() => {
    if (issued === null) keepDraft(draft);
  }, [draft, issued]);

  // A long form: a press that is refused leads to the first field with a complaint, in the order of the page; where none has
  // one, to what the server says of the first mount that cannot be judged.
  useEffect(() => {
    if (refused === 0) return;
    const unfitAt = draft.mounts.find((m) => fit[m.id] !== true);
    const to = form.current?.querySelector<HTMLElement>('[aria-invalid="true"]') ?? (unfitAt ? document.getElementById(`${unfitAt.id}-check`) : null);
    to?.focus({ preventScroll: true });
    to?.scrollIntoView({ block: 'center' });
    // Only a refusal leads: nobody is moved while typing.
  }, [refused]);

  // Crews that somebody is in; null where that is not known.
  const [manned, setManned] = useState<string[] | null>(null);
  useEffect(() => {
    api.people().then(
      (list) => setManned([...new Set(list.flatMap((p) => (p.role === 'climber' && p.crew ? [p.crew] : [])))]),
      () => setManned(null),
    );
  }, []);
  const crews = [...new Set([...(manned ?? []), ...(jobs ?? []).map((j) => j.crew)])].sort();
  const crew = crewAsKnown(draft.crew, [...(manned ?? []), ...crews]);

  if (issued !== null) {
    return (
      <div class="page plan">
        <h1>{t('desk.issued', { site: issued.site.trim() })}</h1>
        <p>{t('desk.issued.what', { crew: crewName(issued.crew) })}</p>
        <p class="buttons">
          <Button href={hrefOf({ page: 'queue', tab: 'issued', job: issued.id, mount: null })}>{t('desk.issued.open')}</Button>
          <Button
            onPress={() => {
              setDraft(newDraft());
              setFit({});
              setAsked(false);
              setIssued(null);
            }}
          >
            {t('desk.issued.another')}
          </Button>
        </p>
      </div>
    );
  }

  const set = (part: TextPart) => (text: string) => {
    setProblem(null);
    setDraft((d) => ({ ...d, [part]: text }));
  };
  const lat = coordinate(draft.lat, 90);
  const lon = coordinate(draft.lon, 180);
  const missing = (part: 'site' | 'title' | 'crew') =>
    asked && draft[part].trim() === '' ? t(`desk.plan.missing.${part}`) : fromServer(part);
  const fromServer = (field: string) => (problem?.field === field ? problem.text : null);
  const half = (draft.lat.trim() === '') !== (draft.lon.trim() === '');
  const unfit = draft.mounts.filter((m) => fit[m.id] !== true);
  const ready =
    draft.site.trim() !== '' &&
    draft.title.trim() !== '' &&
    draft.crew.trim() !== '' &&
    draft.mounts.every((m) => m.name.trim() !== '') &&
    unfit.length === 0 &&
    lat !== 'wrong' &&
    lon !== 'wrong' &&
    !half;

  const submit = (event: Event) => {
    event.preventDefault();
    setAsked(true);
    if (busy) return;
    if (!ready) {
      setRefused((n) => n + 1);
      return;
    }
    setBusy(true);
    setProblem(null);
    const orNull = (text: string) => (text.trim() === '' ? null : text.trim());
    api
      .issue({
        id: draft.id,
        site: draft.site.trim(),
        title: draft.title.trim(),
        crew,
        visit_on: orNull(draft.visit_on),
        access: orNull(draft.access),
        emergency: orNull(draft.emergency),
        lat_deg: lat,
        lon_deg: lon,
        mounts: draft.mounts.flatMap((m) => {
          const sheet = sheetIn(m.text);
          if (sheet === null) return [];
          const title = sheet.title?.trim() || `${draft.site.trim()}, ${m.name.trim()}`;
          return [{ id: m.id, name: m.name.trim(), sheet: { ...sheet, title } }];
        }),
      })
      .then(
        () => {
          dropDraft();
          setIssued({ ...draft, crew });
          onIssued();
        },
        (err: unknown) => {
          if (!(err instanceof api.ApiProblem)) return setProblem({ field: '', text: t('desk.plan.unreachable') });
          setProblem({ field: err.field, text: err.detail });
          setRefused((n) => n + 1);
        },
      )
      .finally(() => setBusy(false));
  };

  const sites = [...new Set((jobs ?? []).map((j) => j.site))].sort();
  const nobody = manned !== null && crew !== '' && !manned.includes(crew) ? t('desk.plan.crew-empty') : null;
  return (
    <form ref={form} class="page plan" onSubmit={submit} noValidate>
      <h1>{t('desk.plan')}</h1>
      <div class="visit-form">
        <TextField id="plan-site" label={t('desk.plan.site')} text={draft.site} onText={set('site')} error={missing('site')} known={sites} />
        <TextField id="plan-title" label={t('desk.plan.title')} hint={t('desk.plan.title-hint')} text={draft.title} onText={set('title')} error={missing('title')} />
        <TextField id="plan-crew" label={t('desk.plan.crew')} hint={nobody} text={draft.crew} onText={set('crew')} error={missing('crew')} known={crews} />
        <TextField id="plan-visit" label={t('desk.plan.visit')} type="date" text={draft.visit_on} onText={set('visit_on')} error={fromServer('visit_on')} />
        <TextField id="plan-lat" label={t('desk.plan.lat')} hint={t('desk.plan.lat-hint')} text={draft.lat} onText={set('lat')} error={lat === 'wrong' ? t('desk.plan.lat-wrong') : half && draft.lat.trim() === '' ? t('desk.plan.half') : fromServer('lat_deg')} numeric />
        <TextField id="plan-lon" label={t('desk.plan.lon')} hint={t('desk.plan.lon-hint')} text={draft.lon} onText={set('lon')} error={lon === 'wrong' ? t('desk.plan.lon-wrong') : half && draft.lon.trim() === '' ? t('desk.plan.half') : fromServer('lon_deg')} numeric />
        <TextField id="plan-access" label={t('desk.plan.access')} hint={t('desk.plan.access-hint')} text={draft.access} onText={set('access')} error={fromServer('access')} lines={2} />
        <TextField id="plan-emergency" label={t('desk.plan.emergency')} hint={t('desk.plan.emergency-hint')} text={draft.emergency} onText={set('emergency')} error={fromServer('emergency')} lines={2} />
      </div>
      {draft.mounts.map((mount, i) => (
        <MountForm
          key={mount.id}
          mount={mount}
          place={i + 1}
          nameMissing={asked && mount.name.trim() === ''}
          onChange={(change) => {
            setProblem(null);
            setDraft((d) => ({
              ...d,
              mounts: d.mounts.map((m) => (m.id === mount.id ? { ...m, ...change } : m)),
            }));
          }}
          onFit={(is) => setFit((f) => (f[mount.id] === is ? f : { ...f, [mount.id]: is }))}
          onRemove={
            draft.mounts.length === 1
              ? null
              : () => setDraft((d) => ({ ...d, mounts: d.mounts.filter((m) => m.id !== mount.id) }))
          }
        />
      ))}
      <p class="buttons">
        <Button onPress={() => setDraft((d) => ({ ...d, mounts: [...d.mounts, newMount(d.mounts)] }))}>
          {t('desk.plan.add-mount')}
        </Button>
      </p>
      <footer class="decision">
        <div class="decision-facts">
          {problem !== null && (
            <Message tone="wrong" live>
              {problem.text} {problem.field !== '' && <code>{problem.field}</code>}
            </Message>
          )}
          {asked && !ready && problem === null && (
            <Message tone="wrong" live>
              {unfit.length > 0
                ? t('desk.plan.unfit', { n: unfit.length })
                : t('desk.plan.incomplete')}
            </Message>
          )}
          {!asked && problem === null && <p>{t('desk.plan.issue-what')}</p>}
        </div>
        <Button
          onPress={() => {
            dropDraft();
            setDraft(newDraft());
            setFit({});
            setAsked(false);
          }}
        >
          {t('desk.plan.empty')}
        </Button>
        <Button type="submit" kind="first" busy={busy}>
          {t('desk.plan.issue')}
        </Button>
      </footer>
    </form>
  );
}

function coordinate(text: string, most: number): number | null | 'wrong' {
  if (text.trim() === '') return null;
  const typed = readNumber(text);
  return typed.ok && Math.abs(typed.value) <= most ? typed.value : 'wrong';
}
