// Local time with its offset, as RFC 3339 has it: the desk must see what the clock on the wall said.

export function localTime(at: Date): string {
  const offset = -at.getTimezoneOffset(); // minutes east
  const sign = offset < 0 ? '-' : '+';
  const east = Math.abs(offset);
  const two = (n: number) => String(n).padStart(2, '0');
  const three = (n: number) => String(n).padStart(3, '0');
  return (
    `${String(at.getFullYear()).padStart(4, '0')}-${two(at.getMonth() + 1)}-${two(at.getDate())}` +
    `T${two(at.getHours())}:${two(at.getMinutes())}:${two(at.getSeconds())}.${three(at.getMilliseconds())}` +
    `${sign}${two(Math.trunc(east / 60))}:${two(east % 60)}`
  );
}
