// The pages of aim and radio figures by their address.
import type { AimRoute } from '../route.ts';
import { AimPage } from './AimPage.tsx';
import { CompassPage } from './CompassPage.tsx';
import { FiguresPage } from './FiguresPage.tsx';
import { GroundPage } from './GroundPage.tsx';
import { LeanPage } from './LeanPage.tsx';
import { PathPage } from './PathPage.tsx';
import { PeakPage } from './PeakPage.tsx';
import { RadioPageEntry } from './RadioPageEntry.tsx';
import { SightPage } from './SightPage.tsx';

export function AimPages({ route }: { route: AimRoute }) {
  const { job, mount } = route;
  switch (route.page) {
    case 'aim':
      return <AimPage job={job} mount={mount} />;
    case 'sun':
    case 'landmark':
      return <SightPage job={job} mount={mount} reference={route.page} />;
    case 'compass':
      return <CompassPage job={job} mount={mount} />;
    case 'path':
      return <PathPage job={job} mount={mount} />;
    case 'ground':
      return <GroundPage job={job} mount={mount} />;
    case 'lean':
      return <LeanPage job={job} mount={mount} />;
    case 'peak':
      return <PeakPage job={job} mount={mount} />;
    case 'figures':
      return <FiguresPage job={job} mount={mount} />;
    case 'radio-near':
    case 'radio-far':
      return <RadioPageEntry job={job} mount={mount} end={route.page === 'radio-near' ? 'near' : 'far'} />;
  }
}
