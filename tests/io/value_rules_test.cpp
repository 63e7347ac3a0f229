#include "io/value_rules.h"

#include "io/nc_sample.h"

namespace lagscape {
namespace {

using namespace test;

struct Decoded {
  std::vector<double> values;
  ValueCounts counts;
  std::vector<std::string> notes;
};

// Writes a series of a type with attributes set by `declare`, and decodes it by the rules read from the file.
template <typename T, typename Declare>
Decoded decode(nc_type type, const std::vector<T>& stored, Declare declare, const InputRequest& job = {},
               int mode = NC_NETCDF4) {
  const Folder folder;
  NcSample sample(folder / "values.nc", mode);
  const int dim = sample.dim("time", stored.size()), var = sample.var("wetness", type, {dim});
  declare(sample, var);
  const std::string path = sample.close();
  const NcFile file = NcFile::open(path);
  Decoded out;
  const ValueRules rules = read_value_rules(file, file.find("wetness").value(), job, out.notes);
  out.values.resize(stored.size());
  rules.decode(reinterpret_cast<const std::byte*>(stored.data()), stored.size(), out.values.data(), out.counts);
  return out;
}

const auto kNothing = [](NcSample&, int) {};

// Oracle: python3-netcdf4 1.6 turns these bytes with _Unsigned, valid_range 0,-6, scale .5, offset 10 into 10, 60, 110,
// --.
TEST(ValueRules, UnsignedBytesWithRangeAndPackingAgreeWithNetcdf4Python) {
  const Decoded out = decode<std::int8_t>(NC_BYTE, {0, 100, -56, -1}, [](NcSample& s, int v) {
    s.text(v, "_Unsigned", "true");
    s.numbers(v, "valid_range", NC_BYTE, {0, -6});
    s.numbers(v, "scale_factor", NC_DOUBLE, {0.5});
    s.numbers(v, "add_offset", NC_DOUBLE, {10});
  });
  expect_same(out.values, {10, 60, 110, kNaN});
  EXPECT_EQ(out.counts.out_of_range, 1U);
  EXPECT_EQ(out.counts.fill, 0U);
}

TEST(ValueRules, FillAndEveryMissingValueAreTestedAsStored) {
  const Decoded out = decode<std::int16_t>(NC_SHORT, {-999, -1016, 7, 8, 9}, [](NcSample& s, int v) {
    s.numbers(v, "_FillValue", NC_SHORT, {-999});
    s.numbers(v, "missing_value", NC_SHORT, {7, 9});
    s.numbers(v, "scale_factor", NC_DOUBLE, {0.25});
  });
  expect_same(out.values, {kNaN, -254, kNaN, 2, kNaN});  // -1016 lies below the fill and is a value
  EXPECT_EQ(out.counts.fill, 3U);
}

TEST(ValueRules, FillOfAnotherTypeIsComparedAfterTheCast) {
  // missing_value as a double beside a float variable: equal only as a float.
  const Decoded out = decode<float>(NC_FLOAT, {-99.9F, 1.0F},
                                    [](NcSample& s, int v) { s.numbers(v, "missing_value", NC_DOUBLE, {-99.9}); });
  expect_same(out.values, {kNaN, 1});
  // A short can never be 1e20.
  expect_same(
      decode<std::int16_t>(NC_SHORT, {5}, [](NcSample& s, int v) { s.numbers(v, "missing_value", NC_DOUBLE, {1e20}); })
          .values,
      {5});
}

TEST(ValueRules, NeverWrittenDataIsMissingByTheDefaultFillButBytesHaveNone) {
  expect_same(decode<float>(NC_FLOAT, {NC_FILL_FLOAT, 2}, kNothing).values, {kNaN, 2});
  expect_same(decode<std::int16_t>(NC_SHORT, {NC_FILL_SHORT, 2}, kNothing).values, {kNaN, 2});
  expect_same(decode<std::int16_t>(NC_SHORT, {NC_FILL_SHORT, 2}, kNothing, {}, 0).values, {kNaN, 2});
  expect_same(decode<std::int8_t>(NC_BYTE, {NC_FILL_BYTE, 2}, kNothing).values, {NC_FILL_BYTE, 2});
  expect_same(decode<double>(NC_DOUBLE, {NC_FILL_DOUBLE, 2}, kNothing).values, {kNaN, 2});
}

TEST(ValueRules, NanAndInfinityAreMissingWhateverIsDeclared) {
  const Decoded out = decode<double>(NC_DOUBLE, {kNaN, kInfinity, -kInfinity, 4, 1e20},
                                     [](NcSample& s, int v) { s.numbers(v, "_FillValue", NC_DOUBLE, {1e20}); });
  expect_same(out.values, {kNaN, kNaN, kNaN, 4, kNaN});
  EXPECT_EQ(out.counts.fill, 2U);
  EXPECT_EQ(out.counts.infinite, 2U);
}

TEST(ValueRules, JobsMissingValuesAndRangeAreInUnpackedUnits) {
  InputRequest job;
  job.missing_values = {2.5};
  job.valid_range = {{0, 10}};
  const Decoded out = decode<std::int16_t>(
      NC_SHORT, {5, 10, 19, 20, 21, -1}, [](NcSample& s, int v) { s.numbers(v, "scale_factor", NC_DOUBLE, {0.5}); },
      job);
  expect_same(out.values, {kNaN, 5, 9.5, 10, kNaN, kNaN});
  EXPECT_EQ(out.counts.job_missing, 1U);
  EXPECT_EQ(out.counts.out_of_range, 2U);
}

TEST(ValueRules, JobsDecimalsMeanWhatAFloatHoldsForThem) {
  InputRequest job;
  job.missing_values = {-99.9};
  job.valid_range = {{-200, 0.1}};
  expect_same(decode<float>(NC_FLOAT, {-99.9F, 0.1F, 0.2F}, kNothing, job).values,
              {kNaN, static_cast<double>(0.1F), kNaN});
}

TEST(ValueRules, ListedDecimalsAreFoundWherePackingIsNotExact) {
  InputRequest job;
  job.missing_values = {-999.9, 0.3};
  const std::vector<std::int16_t> stored = {-9999, -9998, 3, 4};
  for (const nc_type type : {NC_DOUBLE, NC_FLOAT}) {  // the type of scale_factor
    const Decoded out = decode<std::int16_t>(
        NC_SHORT, stored, [&](NcSample& s, int v) { s.numbers(v, "scale_factor", type, {0.1}); }, job);
    EXPECT_TRUE(std::isnan(out.values[0]) && std::isnan(out.values[2]));
    EXPECT_NEAR(out.values[1], -999.8, 1e-4);
    EXPECT_NEAR(out.values[3], 0.4, 1e-6);
    EXPECT_EQ(out.counts.job_missing, 2U);
    EXPECT_EQ(out.counts.fill, 0U);
    EXPECT_TRUE(out.notes.empty());
  }
  const auto offset = [](NcSample& s, int v) {
    s.numbers(v, "scale_factor", NC_FLOAT, {0.01});
    s.numbers(v, "add_offset", NC_FLOAT, {273.15});
  };
  job.missing_values = {-50.05};  // 273.15 - 323.2
  EXPECT_EQ(decode<std::int16_t>(NC_SHORT, {-32320, -32319, -32321, 0}, offset, job).counts.job_missing, 1U);
}

TEST(ValueRules, ListedDecimalsAreFoundInPackedFloats) {
  InputRequest job;
  job.missing_values = {-999.9, 0.25};
  const Decoded out = decode<float>(
      NC_FLOAT, {-9999, 2.5F, 2.25F}, [](NcSample& s, int v) { s.numbers(v, "scale_factor", NC_FLOAT, {0.1}); }, job);
  EXPECT_EQ(out.counts.job_missing, 2U);
  EXPECT_TRUE(std::isnan(out.values[0]) && std::isnan(out.values[1]) && !std::isnan(out.values[2]));
}

TEST(ValueRules, ListedValueThatCannotBeStoredIsNoted) {
  InputRequest job;
  job.missing_values = {-999.95, 4000, 5};
  const Decoded packed = decode<std::int16_t>(
      NC_SHORT, {50, -9999}, [](NcSample& s, int v) { s.numbers(v, "scale_factor", NC_DOUBLE, {0.1}); }, job);
  EXPECT_EQ(packed.counts.job_missing, 1U);
  ASSERT_EQ(packed.notes.size(), 2U);
  EXPECT_TRUE(has(packed.notes[0], "-999.95 marks nothing") && has(packed.notes[0], "16-bit integers"))
      << packed.notes[0];
  EXPECT_TRUE(has(packed.notes[1], "4000 marks nothing")) << packed.notes[1];
  job.missing_values = {-1, 255};
  const Decoded bytes = decode<std::uint8_t>(NC_UBYTE, {255, 1}, kNothing, job);
  expect_same(bytes.values, {kNaN, 1});
  ASSERT_EQ(bytes.notes.size(), 1U);
  EXPECT_TRUE(has(bytes.notes[0], "-1 marks nothing")) << bytes.notes[0];
}

TEST(ValueRules, JobsRangeKeepsPackedValuesOnItsEdges) {
  InputRequest job;
  for (const nc_type type : {NC_DOUBLE, NC_FLOAT})
    for (const double edge : {3.0, 30000.0}) {
      job.valid_range = {{-edge / 10, edge / 10}};
      const auto raw = static_cast<std::int16_t>(edge);
      const Decoded out = decode<std::int16_t>(
          NC_SHORT,
          {raw, static_cast<std::int16_t>(-raw), static_cast<std::int16_t>(raw + 1),
           static_cast<std::int16_t>(-raw - 1)},
          [&](NcSample& s, int v) { s.numbers(v, "scale_factor", type, {0.1}); }, job);
      EXPECT_FALSE(std::isnan(out.values[0]) || std::isnan(out.values[1]));
      EXPECT_EQ(out.counts.out_of_range, 2U);
    }
}

TEST(ValueRules, ValidMinimumAndMaximumBound) {
  const Decoded out = decode<std::int32_t>(NC_INT, {-1, 0, 50, 51}, [](NcSample& s, int v) {
    s.numbers(v, "valid_min", NC_INT, {0});
    s.numbers(v, "valid_max", NC_INT, {50});
  });
  expect_same(out.values, {kNaN, 0, 50, kNaN});
  EXPECT_EQ(out.counts.out_of_range, 2U);
}

TEST(ValueRules, RealRangeOfPackedIntegersIsUnpackedAndNoted) {
  const Decoded out = decode<std::int16_t>(NC_SHORT, {100, 250}, [](NcSample& s, int v) {
    s.numbers(v, "scale_factor", NC_FLOAT, {0.5});
    s.numbers(v, "valid_range", NC_FLOAT, {0, 100});
  });
  expect_same(out.values, {50, kNaN});
  ASSERT_EQ(out.notes.size(), 1U);
  EXPECT_TRUE(has(out.notes[0], "unpacked"));
}

TEST(ValueRules, EveryIntegerTypeIsReadInFull) {
  expect_same(decode<std::uint8_t>(NC_UBYTE, {0, 200, 255}, kNothing).values, {0, 200, 255});
  expect_same(decode<std::uint16_t>(NC_USHORT, {0, 65000}, kNothing).values, {0, 65000});
  expect_same(decode<std::uint32_t>(NC_UINT, {4000000000U}, kNothing).values, {4e9});
  expect_same(decode<std::int64_t>(NC_INT64, {-5000000000}, kNothing).values, {-5e9});
  expect_same(decode<std::uint64_t>(NC_UINT64, {1ULL << 63U}, kNothing).values, {9223372036854775808.0});
  const auto is_unsigned = [](NcSample& s, int v) { s.text(v, "_Unsigned", "True"); };
  expect_same(decode<std::int16_t>(NC_SHORT, {-1, 5}, is_unsigned).values, {65535, 5});
  expect_same(decode<std::int32_t>(NC_INT, {-1}, is_unsigned).values, {4294967295.0});
}

TEST(ValueRules, NumbersWrittenAsTextAreReadLeniently) {
  const Decoded out = decode<std::int16_t>(NC_SHORT, {-9999, 20}, [](NcSample& s, int v) {
    s.text(v, "missing_value", "-9999");
    s.text(v, "scale_factor", "0.1");
  });
  expect_same(out.values, {kNaN, 2});
}

TEST(ValueRules, PackingByZeroIsRefused) {
  EXPECT_TRUE(has(message_of([] {
                    decode<std::int16_t>(NC_SHORT, {1},
                                         [](NcSample& s, int v) { s.numbers(v, "scale_factor", NC_DOUBLE, {0}); });
                  }),
                  "scale_factor 0"));
}

}  // namespace
}  // namespace lagscape
