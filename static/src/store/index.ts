// What views may use of the store.
export { addEntry, counts, entriesOf, needingPerson, NotSignedIn, ownEntries } from './entries.ts';
export type { AddOptions } from './entries.ts';
export { onChange, storeHealth } from './database.ts';
export type { StoreHealth } from './database.ts';
export { dropDraft, getDraft, setDraft } from './drafts.ts';
export { job, jobs } from './jobs.ts';
export { sendAgain } from './outbox.ts';
export { storageProtection } from './protection.ts';
export { dropSetting, getSetting, setSetting } from './settings.ts';
export { localTime } from './time.ts';
export { useStored, useWatched } from './use.ts';
