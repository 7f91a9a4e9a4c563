// Package report defines the documents that knell hands out and writes them. It
// knows nothing of how their numbers were found.
//
// The road of the data:
//
//  1. The caller fills a Weighing (weighing.go), a Posterior per hypothesis
//     (posterior.go), or the document of a table of physics: ModesDocument,
//     BarrierDocument, EchoDocument (modes.go, barrier.go, echo.go).
//  2. Weighing.WriteJSON prints the document of --json; Table (table.go) prints
//     the same for a reader.
//  3. WriteDirectory (directory.go) keeps evidence.json, the posteriors as CSV and
//     Parquet and the config as run; files appear whole or not at all (staged.go).
//  4. BarrierPicture and EchoPicture (barrier_plot.go, echo_plot.go) say what a
//     picture shows; WritePicture draws it (plot*.go).
//  5. Meter (meter.go) shows how far a long command is.
//
// Numbers of a document are of type Number: one that is not finite is null in JSON,
// which has no other word for it.
package report
