// Width of an element in CSS pixels, kept up with turning and resizing.
import type { RefObject } from 'preact';
import { useLayoutEffect, useRef, useState } from 'preact/hooks';

/** Less than this is no column but a page that is still unfolding; nothing could be drawn in it. */
const least = 80;

export function useWidth<E extends Element>(first: number): [RefObject<E | null>, number] {
  const ref = useRef<E | null>(null);
  const [width, setWidth] = useState(first);
  useLayoutEffect(() => {
    const element = ref.current;
    if (!element) return;
    const measure = () => {
      const now = Math.round(element.getBoundingClientRect().width);
      if (now >= least) setWidth(now);
    };
    measure();
    const observer = new ResizeObserver(measure);
    observer.observe(element);
    return () => observer.disconnect();
  }, []);
  return [ref, width];
}
