// Says the texts of aim, peak search and radio figures, which phone and desk share.
import { aimEn } from './aim.en.ts';
import { sayer } from './say.ts';
import { language } from './words.ts';

export const say = sayer(aimEn, language);
