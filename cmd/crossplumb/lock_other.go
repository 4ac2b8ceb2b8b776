//go:build !unix

package main

// lockFolder does nothing where there is no flock: running one server on one folder is then up to who starts it.
func lockFolder(string) (unlock func(), err error) { return func() {}, nil }
