package wire

import (
	"crossplumb/calc/codec"
	"crossplumb/calc/sheet"
)

func mountOperations() []operation {
	return []operation{
		{"mount.fold", mountFold, []string{"pooling of all readings since the bolt last moved: common practice"}},
	}
}

// maxEntries bounds the entries of one mount that are folded at once.
const maxEntries = 10000

func mountFold(v *codec.Value) (answer, *Problem) {
	f := codec.Open(v)
	doc := f.Child("sheet")
	entries := f.Items("entries", 0, maxEntries)
	if p := f.Done(); p != nil {
		return nil, p
	}
	folded, p := sheet.Fold(doc, entries)
	if p != nil {
		return nil, p
	}
	return codec.Obj(codec.M("sheet", folded)), nil
}
