package page

import (
	"bytes"
	"compress/gzip"
	"embed"
	"io/fs"
	"mime"
	"net/http"
	"path"
	"sync"
)

//go:embed assets
var assetFiles embed.FS

// asset is a file as it is served.
type asset struct {
	kind, tag   string
	plain, gzip []byte
}

// packed has all assets, compressed once.
var packed = sync.OnceValue(func() map[string]asset {
	all := make(map[string]asset)
	err := fs.WalkDir(assetFiles, "assets", func(name string, d fs.DirEntry, err error) error {
		if err != nil || d.IsDir() {
			return err
		}
		text, err := assetFiles.ReadFile(name)
		all["/"+name] = pack(name, text)
		return err
	})
	if err != nil {
		panic(err) // what is embedded can be read
	}
	return all
})

func pack(name string, text []byte) asset {
	a := asset{kind: mime.TypeByExtension(path.Ext(name)), tag: tagOf(text), plain: text}
	switch path.Ext(name) { // as no table of the system may have it
	case ".js":
		a.kind = "text/javascript; charset=utf-8"
	case ".css":
		a.kind = "text/css; charset=utf-8"
	case ".svg":
		a.kind = "image/svg+xml"
	case "":
		a.kind = "text/plain; charset=utf-8"
	}
	var b bytes.Buffer
	z, _ := gzip.NewWriterLevel(&b, gzip.BestCompression)
	_, _ = z.Write(text) // into memory
	_ = z.Close()
	if b.Len() < len(text) {
		a.gzip = b.Bytes()
	}
	return a
}

// assets serves what is embedded. It is asked for anew each time, and costs nothing where it
// has not changed.
func assets() http.Handler {
	return http.HandlerFunc(func(w http.ResponseWriter, r *http.Request) {
		a, ok := packed()[path.Clean(r.URL.Path)]
		if !ok {
			http.NotFound(w, r)
			return
		}
		h := w.Header()
		h.Set("Content-Type", a.kind)
		h.Set("Cache-Control", "no-cache")
		h.Set("Vary", "Accept-Encoding")
		if a.gzip != nil && takesGzip(r.Header.Values("Accept-Encoding")) {
			h.Set("Content-Encoding", "gzip")
			whole(w, r, tagOfPacked(a.tag), a.gzip)
			return
		}
		whole(w, r, a.tag, a.plain)
	})
}
