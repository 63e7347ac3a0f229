#pragma once
#include <cstdint>
#include <iosfwd>
#include <optional>
#include <string>

namespace lagscape {

/// Bytes that a classic netCDF file (CDF-1, CDF-2, CDF-5) must have by its own header, up to the last value; nothing if
/// the stream is no classic file. Throws std::length_error if the header itself ends early, std::invalid_argument if it
/// is damaged. Source: "The NetCDF Classic Format Specification" (NetCDF Users Guide, appendix B).
[[nodiscard]] std::optional<std::uint64_t> classic_bytes_needed(std::istream& in, std::uint64_t file_size);

/// Refuses a classic file that is shorter than its header promises: the library would read the lost part as zeros.
/// Does nothing for other or absent files. Throws Error{input}.
void refuse_truncated_classic(const std::string& path);

}  // namespace lagscape
