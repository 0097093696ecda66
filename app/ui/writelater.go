package ui

import (
	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/storage/repository"
)

// laterRepository is the toolkit's file repository, but for writers: the toolkit's
// save dialog empties the file that it asks a writer for before anything was
// written. The writer given here opens nothing; the program writes the file itself,
// as a whole or not at all.
type laterRepository struct {
	fileRepository
}

// fileRepository is all that the toolkit's repository of files can do.
type fileRepository interface {
	repository.Repository
	repository.WritableRepository
	repository.ListableRepository
	repository.HierarchicalRepository
	repository.CopyableRepository
	repository.MovableRepository
}

// writeLater wraps the repository of files. One of another kind is left as it is.
func writeLater(r repository.Repository) repository.Repository {
	if files, ok := r.(fileRepository); ok {
		return laterRepository{files}
	}
	return r
}

// Writer names the file and does nothing else.
func (laterRepository) Writer(u fyne.URI) (fyne.URIWriteCloser, error) { return namedOnly{u}, nil }

type namedOnly struct{ uri fyne.URI }

func (n namedOnly) URI() fyne.URI               { return n.uri }
func (n namedOnly) Write(p []byte) (int, error) { return len(p), nil }
func (n namedOnly) Close() error                { return nil }
