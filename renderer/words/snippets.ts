/** How a bundle is opened elsewhere, ready to be copied: the arrays are NPY 1.0, little-endian, C order. */
export type Language = 'Python' | 'R' | 'Julia';

export const LANGUAGES: readonly Language[] = ['Python', 'R', 'Julia'];

export function snippet(language: Language, bundle: string): string {
  return { Python: python, R: r, Julia: julia }[language](JSON.stringify(bundle));
}

function python(bundle: string): string {
  return `import json, pathlib, numpy as np

bundle = pathlib.Path(${bundle})
manifest = json.loads((bundle / "manifest.json").read_text())
replicas = np.load(bundle / "replicas.npy", mmap_mode="r")  # [replica, column, outcome]
mean = np.load(bundle / "posterior" / "mean.npy")           # [column, outcome]
print(replicas.shape, manifest["columns"][:3], manifest["outcomes"][:3])`;
}

function r(bundle: string): string {
  return `read_npy <- function(path) {  # float64, C order
  con <- file(path, "rb")
  on.exit(close(con))
  readBin(con, "raw", 8)
  size <- readBin(con, "integer", 1, size = 2, signed = FALSE, endian = "little")
  header <- rawToChar(readBin(con, "raw", size))
  inner <- sub(".*shape[^(]*\\\\(([^)]*)\\\\).*", "\\\\1", header)
  shape <- as.integer(regmatches(inner, gregexpr("[0-9]+", inner))[[1]])
  values <- readBin(con, "double", prod(shape), size = 8, endian = "little")
  aperm(array(values, rev(shape)), rev(seq_along(shape)))
}

bundle <- ${bundle}
replicas <- read_npy(file.path(bundle, "replicas.npy"))             # [replica, column, outcome]
mean <- read_npy(file.path(bundle, "posterior", "mean.npy"))        # [column, outcome]
dim(replicas)`;
}

function julia(bundle: string): string {
  return `using NPZ, JSON  # ] add NPZ JSON

bundle = ${bundle}
manifest = JSON.parsefile(joinpath(bundle, "manifest.json"))
replicas = npzread(joinpath(bundle, "replicas.npy"))            # [replica, column, outcome]
mean = npzread(joinpath(bundle, "posterior", "mean.npy"))       # [column, outcome]
size(replicas)`;
}
