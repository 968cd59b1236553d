# Folds a spectrum with every replica of an Entasis bundle and prints mean and sd of each outcome.
#
#     Rscript fold.R BUNDLE [SPECTRUM]
#
# BUNDLE is the folder that `entasis build` wrote. SPECTRUM is a text file with one number a line: the expected events
# of each column (for a numeric axis: below, the bins, above). Without it, 1000 each. Base R alone; outcomes are printed
# by their number, counted from 1 in the order of manifest.json. The sd is the uncertainty that the calibration's
# statistics leave in the folded spectrum: systematic effects are yours to add.

# Opens an NPY 1.0 file of doubles at its first number; `shape` is in C order (the last index runs fastest).
open_npy <- function(path) {
  file <- file(path, "rb")
  magic <- readBin(file, "raw", 8)
  stopifnot(identical(magic, as.raw(c(0x93, 0x4e, 0x55, 0x4d, 0x50, 0x59, 1, 0))))
  length <- readBin(file, "integer", 1, size = 2, signed = FALSE, endian = "little")
  header <- readChar(file, length, useBytes = TRUE)
  stopifnot(grepl("'descr': '<f8'", header, fixed = TRUE), grepl("'fortran_order': False", header, fixed = TRUE))
  shape <- as.numeric(strsplit(sub(".*'shape': \\(([^)]*)\\).*", "\\1", header), ", *")[[1]])
  list(file = file, shape = shape)
}

arguments <- commandArgs(trailingOnly = TRUE)
npy <- open_npy(file.path(arguments[1], "replicas.npy"))
replicas <- npy$shape[1]
columns <- npy$shape[2]
outcomes <- npy$shape[3]
expected <- if (length(arguments) > 1) scan(arguments[2], quiet = TRUE) else rep(1000, columns)

folded <- matrix(0, outcomes, replicas)
for (r in seq_len(replicas)) {
  # R keeps the first index fastest, so that one replica in C order arrives as [outcome, column].
  p <- matrix(readBin(npy$file, "double", columns * outcomes, endian = "little"), outcomes, columns)
  folded[, r] <- p %*% expected
}
close(npy$file)

cat(sprintf("%d\t%.6g\t%.6g\n", seq_len(outcomes), rowMeans(folded), apply(folded, 1, sd)), sep = "")
