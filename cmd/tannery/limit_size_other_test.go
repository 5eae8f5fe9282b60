//go:build !linux

package main

func limitFileSize() {}
