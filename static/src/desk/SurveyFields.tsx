// Where both ends stand, what stands between them, and known points to sight by. From the coordinates the server works
// out bearing, elevation and distance, and the form takes them over on a press.

import { Fragment } from 'preact';
import { useState } from 'preact/hooks';
import type { Target } from '../aim/answers.ts';
import { targetQuestion } from '../aim/questions.ts';
import { bearing, upDown } from '../aim/say.ts';
import { type Ask, problemOf, useReckoned } from '../aim/useReckoned.ts';
import { metres } from '../draw/PathProfile.tsx';
import { Button } from '../parts/Button.tsx';
import { Message } from '../parts/Message.tsx';
import type { Landmark, Obstacle, Place, Sheet } from '../types.ts';
import { say } from '../words/aim.ts';
import * as api from './api.ts';
import { NumberField } from './NumberField.tsx';
import { repath } from './sheets.ts';
import { TextField } from './TextField.tsx';

interface Props {
  id: string;
  sheet: Sheet;
  edit: (change: (sheet: Sheet) => void) => void;
  problemAt: (...fields: string[]) => string | null;
  onUnread: (id: string, unread: boolean) => void;
}

const ask: Ask = (op, input) => api.reckon(op, input);

const parts = [
  { field: 'lat_deg', unit: '°', optional: false },
  { field: 'lon_deg', unit: '°', optional: false },
  { field: 'height_m', unit: 'm', optional: false },
  { field: 'u_m', unit: 'm', optional: true },
] as const;

type Part = (typeof parts)[number]['field'];

/** A place of which nothing is left is no place; a part that is not typed yet is missing, and the server says so. */
function withPart<P extends Partial<Place>>(place: P | null | undefined, part: Part, value: number | null): P | null {
  const next = { ...place } as Record<string, unknown>;
  if (value === null) delete next[part];
  else next[part] = value;
  return parts.some(({ field }) => next[field] !== undefined && next[field] !== null) ? (next as unknown as P) : null;
}

export function SurveyFields({ id, sheet, edit, problemAt, onUnread }: Props) {
  const { path } = sheet;
  const whole = (p: Place | null | undefined) => p && [p.lat_deg, p.lon_deg, p.height_m].every((x) => typeof x === 'number');
  const question = whole(path.near_at) && whole(path.far_at) ? targetQuestion(sheet) : null;
  const target = useReckoned<Target>(ask, 'aim.target', question);
  const [taking, setTaking] = useState<string | null>(null);
  const obstacles = path.obstacles ?? [];
  const landmarks = sheet.landmarks ?? [];

  const take = async () => {
    if (!question) return;
    try {
      const found = await ask<Target>('aim.target', question);
      edit((s) => {
        const round = (x: number, to: number) => Number(x.toFixed(to));
        repath(s, round(found.true_bearing_deg, 2), round(found.elevation_deg, 2));
        s.path.distance_m = round(found.distance_m, 0);
      });
      setTaking(null);
    } catch (error) {
      setTaking(problemOf(error).message);
    }
  };

  const number = (name: string, label: string, unit: string, value: number | null | undefined, put: (s: Sheet, v: number | null) => void, field: string, hint?: string) => (
    <NumberField
      key={name}
      id={`${id}-${name}`}
      label={label}
      unit={unit}
      value={value ?? null}
      optional
      onValue={(v) => edit((s) => put(s, v))}
      hint={hint ?? null}
      problem={problemAt(field)}
      onUnread={onUnread}
    />
  );

  return (
    <>
      <fieldset class="group">
        <legend>{say('desk.survey')}</legend>
        <p class="hint wide">{say('desk.survey.what')}</p>
        {(['near_at', 'far_at'] as const).map((end) =>
          parts.map(({ field, unit }) =>
            number(`${end}-${field}`, say(`desk.survey.${end}.${field}`), unit, path[end]?.[field], (s, v) => (s.path[end] = withPart(s.path[end], field, v)), `path.${end}.${field}`),
          ),
        )}
        <TextField
          id={`${id}-datum`}
          label={say('desk.survey.datum')}
          hint={say('desk.survey.datum-hint')}
          text={path.height_datum ?? ''}
          known={['mean sea level', 'WGS 84 ellipsoid']}
          onText={(text) => edit((s) => (s.path.height_datum = text === '' ? null : text))}
          error={problemAt('path.height_datum')}
        />
        {number('k', say('desk.survey.k'), '', path.k_factor, (s, v) => (s.path.k_factor = v), 'path.k_factor', say('desk.survey.k-hint'))}
        {number('ground', say('desk.survey.ground'), 'm', path.above_ground_m, (s, v) => (s.path.above_ground_m = v), 'path.above_ground_m', say('desk.survey.ground-hint'))}
        {target.answer && (
          <div class="wide survey-gives">
            <p class="figure">
              {say('desk.survey.gives', { bearing: bearing(target.answer.true_bearing_deg, target.answer.u_bearing_deg), elevation: upDown(target.answer.elevation_deg), distance: metres(target.answer.distance_m) })}
            </p>
            <Button onPress={() => void take()}>{say('desk.survey.take')}</Button>
          </div>
        )}
        {(target.problem || taking) && (
          <div class="wide">
            <Message tone="wrong" live>
              {taking ?? target.problem?.message}
            </Message>
          </div>
        )}
        {target.answer?.remarks.map((remark) => (
          <div class="wide" key={remark}>
            <Message tone="warn">{remark}</Message>
          </div>
        ))}
      </fieldset>

      <fieldset class="group">
        <legend>{say('path.obstacles')}</legend>
        {obstacles.length === 0 && <p class="hint wide">{say('desk.survey.no-obstacles')}</p>}
        {obstacles.map((o, i) => {
          const set = (change: (o: Obstacle) => void) => edit((s) => s.path.obstacles?.[i] && change(s.path.obstacles[i]));
          return (
            <Fragment key={i}>
              <TextField id={`${id}-o${i}-name`} label={say('obstacle.name')} text={o.name ?? ''} onText={(text) => set((x) => (x.name = text === '' ? null : text))} error={problemAt(`path.obstacles[${i}].name`)} />
              {number(`o${i}-at`, say('desk.survey.at'), 'm', o.at_m, (s, v) => putPart(s.path.obstacles?.[i], 'at_m', v), `path.obstacles[${i}].at_m`)}
              {number(`o${i}-top`, say('obstacle.top'), 'm', o.top_m, (s, v) => putPart(s.path.obstacles?.[i], 'top_m', v), `path.obstacles[${i}].top_m`)}
              <Button onPress={() => edit((s) => (s.path.obstacles = (s.path.obstacles ?? []).filter((_, k) => k !== i)))}>{say('desk.survey.remove', { name: o.name ?? String(i + 1) })}</Button>
            </Fragment>
          );
        })}
        <p class="buttons wide">
          <Button onPress={() => edit((s) => (s.path.obstacles = [...(s.path.obstacles ?? []), {} as Obstacle]))}>{say('obstacle.add')}</Button>
        </p>
      </fieldset>

      <fieldset class="group">
        <legend>{say('desk.survey.landmarks')}</legend>
        <p class="hint wide">{say('desk.survey.landmarks-what')}</p>
        {landmarks.map((l, i) => (
          <Fragment key={i}>
            <TextField
              id={`${id}-l${i}-name`}
              label={say('landmark.name')}
              text={l.name ?? ''}
              onText={(text) => edit((s) => s.landmarks?.[i] && (s.landmarks[i].name = text))}
              error={problemAt(`landmarks[${i}].name`)}
            />
            {parts.slice(0, 3).map(({ field, unit }) => number(`l${i}-${field}`, say(`desk.survey.landmark.${field as 'lat_deg' | 'lon_deg' | 'height_m'}`), unit, l[field], (s, v) => putPart(s.landmarks?.[i], field, v), `landmarks[${i}].${field}`))}
            <p class="buttons wide">
              <Button onPress={() => edit((s) => (s.landmarks = (s.landmarks ?? []).filter((_, k) => k !== i)))}>{say('desk.survey.remove', { name: l.name || String(i + 1) })}</Button>
            </p>
          </Fragment>
        ))}
        <p class="buttons wide">
          <Button onPress={() => edit((s) => (s.landmarks = [...(s.landmarks ?? []), { name: '' } as Landmark]))}>{say('desk.survey.add-landmark')}</Button>
        </p>
      </fieldset>
    </>
  );
}

function putPart<P extends object>(on: P | undefined, part: string, value: number | null): void {
  if (!on) return;
  const record = on as unknown as Record<string, unknown>;
  if (value === null) delete record[part];
  else record[part] = value;
}
