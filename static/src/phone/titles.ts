// Titles of jobs beside the name of their site.

/** A job's title without the site's name in front, where that stands next to it anyway. */
export function titleBeside({ site, title }: { site: string; title: string }): string {
  if (!title.startsWith(site)) return title;
  const rest = title.slice(site.length).replace(/^[\s,:;\u2013-]+/, '');
  return rest === '' ? title : rest;
}
