// Command columns reads a CSV file with the reader of a column store, and prints the seconds that took. It is a module of its
// own, so that nobody who builds beadwell needs its dependencies.
package main

import (
	"fmt"
	"os"
	"time"

	"github.com/apache/arrow-go/v18/arrow/csv"
)

// chunk is the number of rows of a record batch.
const chunk = 1 << 16

func main() {
	begin := time.Now()
	rows, err := read(os.Args[1])
	if err != nil {
		fmt.Fprintln(os.Stderr, err)
		os.Exit(1)
	}
	fmt.Println(time.Since(begin).Seconds(), rows)
}

func read(path string) (rows int64, err error) {
	file, err := os.Open(path)
	if err != nil {
		return 0, err
	}
	defer file.Close()
	reader := csv.NewInferringReader(file, csv.WithHeader(true), csv.WithChunk(chunk), csv.WithComment('#'))
	defer reader.Release()
	for reader.Next() {
		rows += reader.RecordBatch().NumRows()
	}
	return rows, reader.Err()
}
