// The desk page: one screen application on top of the server's API.

import '../../style/desk.css';

import { render } from 'preact';
import { Desk } from './Desk';
import { applyTheme, keptTheme } from './theme';

applyTheme(keptTheme());
const root = document.getElementById('page');
if (root) render(<Desk />, root);
