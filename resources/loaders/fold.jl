# Folds a spectrum with every replica of an Entasis bundle and prints mean and sd of each outcome.
#
#     julia fold.jl BUNDLE [SPECTRUM]
#
# BUNDLE is the folder that `entasis build` wrote. SPECTRUM is a text file with one number a line: the expected events
# of each column (for a numeric axis: below, the bins, above). Without it, 1000 each. Julia's standard library alone;
# outcomes are printed by their number, counted from 1 in the order of manifest.json. The sd is the uncertainty that the
# calibration's statistics leave in the folded spectrum: systematic effects are yours to add.

using Mmap, Printf, Statistics

# Maps an NPY 1.0 file of doubles. Julia keeps the first index fastest, so that [replica, column, outcome] in C order
# arrives as [outcome, column, replica].
function map_npy(path)
    file = open(path)
    read(file, 8) == UInt8[0x93, 0x4e, 0x55, 0x4d, 0x50, 0x59, 1, 0] || error("$path: not an NPY 1.0 file")
    header = String(read(file, ltoh(read(file, UInt16))))
    occursin("'descr': '<f8', 'fortran_order': False", header) || error("$path: not doubles in C order")
    shape = parse.(Int, split(match(r"'shape': \(([^)]*)\)", header)[1], ','; keepempty = false))
    return Mmap.mmap(file, Array{Float64,length(shape)}, Tuple(reverse(shape)), position(file))
end

replicas = map_npy(joinpath(ARGS[1], "replicas.npy"))
expected = length(ARGS) > 1 ? parse.(Float64, readlines(ARGS[2])) : fill(1000.0, size(replicas, 2))
folded = reduce(hcat, [replicas[:, :, r] * expected for r in axes(replicas, 3)])
for (k, row) in enumerate(eachrow(folded))
    @printf("%d\t%.6g\t%.6g\n", k, mean(row), std(row))
end
