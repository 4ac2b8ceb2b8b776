// Styles are taken in by the bundler; to the type checker they are imports without a value.
declare module '*.css';
