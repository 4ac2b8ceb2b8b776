// What the page before has to say on the next one: that a reading was kept, and how to take it back. It stays until the
// person goes on; it is no toast.

export interface Notice {
  text: string;
  /** The reading that can be taken back. */
  entry: string | null;
  takenBack: string;
}

let waiting: Notice | null = null;

export function leaveNotice(notice: Notice): void {
  waiting = notice;
}

export function takeNotice(): Notice | null {
  const notice = waiting;
  waiting = null;
  return notice;
}
