// Partition functions tabulated for fits, kept from one analysis to the next.
#pragma once

#include <memory>
#include <string>
#include <vector>

#include <trotline/excitation/tabulated_partition.hpp>
#include <trotline/species/species.hpp>

namespace trotline {

/// The spin isomers of a species, by name; empty where it has only one.
[[nodiscard]] std::vector<std::string> spin_isomers(const Species& species);

/// The share that one spin isomer has of Q: Q(T) times its sum over levels, over the whole sum. Energies
/// count from the lowest level of the species.
[[nodiscard]] std::shared_ptr<const PartitionFunction> isomer_partition(const Species& species,
                                                                        const std::string& isomer);

/// ln Q over a span, one table for each of `isomers` ("" stands for all levels). A survey asks for the same
/// tables ten thousand times, so the last few are kept; safe to call from several threads.
[[nodiscard]] std::vector<std::shared_ptr<const TabulatedPartition>> model_partitions(
    const Species& species, const std::vector<std::string>& isomers, double lowest_k, double highest_k);

}  // namespace trotline
