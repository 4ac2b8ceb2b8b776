import { render } from 'preact';
import '../../style/shared.css';
import { start, status } from '../sync/index.ts';
import { useWatched } from '../store/index.ts';

function Page() {
  const { state, waiting } = useWatched(status);
  return (
    <main>
      <h1>Crossplumb</h1>
      <p>
        {waiting} waiting, {state}
      </p>
    </main>
  );
}

void start();
const page = document.getElementById('page');
if (page) render(<Page />, page);
