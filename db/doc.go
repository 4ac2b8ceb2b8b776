// Package db keeps the record in SQLite: the append-only log of entries, what is derived from it, and the people who
// may write it.
//
// What never happens here:
//
//   - an entry is never changed and never removed (triggers hold it, not good intentions);
//   - an entry is never acknowledged before its transaction is on disk (WAL with synchronous=FULL, checked at start on
//     every kind of connection, since the driver's default is NORMAL and a PRAGMA sent later reaches one connection);
//   - an entry is never refused for good: what cannot be taken is set apart in quarantine with its reason;
//   - a derived table never holds anything that the log does not say: Rebuild makes them again and compares;
//   - a token or a passphrase is never stored, only its hash.
//
// There is one writing connection. Every write is one immediate transaction on it, so the order of commits is the order
// of seq and a reader that follows seq never misses a row. Reads go through a pool of their own that cannot write.
//
// The package knows no HTTP and no physics. A mount sheet is text to it; who calls Append may object to an entry for
// reasons of his own (Incoming.Objection), and it is then set apart like the others.
package db
