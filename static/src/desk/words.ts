// The desk's texts: its own, and those it shares with the phone.

import { deskEn } from '../words/desk.en';
import { en } from '../words/en';
import { sayer } from '../words/say';
import { language } from '../words/words';

export const t = sayer({ ...en, ...deskEn }, language);
