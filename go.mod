module tannery

go 1.26
