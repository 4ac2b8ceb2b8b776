// The desk's texts: its own, and those it shares with the phone.

import { deskEn } from '../words/desk.en.ts';
import { en } from '../words/en.ts';
import { sayer } from '../words/say.ts';
import { language } from '../words/words.ts';

export const t = sayer({ ...en, ...deskEn }, language);
