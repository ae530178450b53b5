// Package archtest holds the project to its layout: which package may import
// which, and what no file of it may contain. It has tests only.
package archtest
