// What views may use of sync.
export { start, syncNow } from './run.ts';
export { NoAnswer, ServerProblem } from './server.ts';
export { acceptInvitation, EntriesWait, session, signIn, signOut } from './session.ts';
export { status } from './status.ts';
export { newVersionWaits, readyOffline, takeNewVersion } from './update.ts';
