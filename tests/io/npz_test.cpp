#include <gtest/gtest.h>

#include "io/inflate.hpp"
#include "io/zip_archive.hpp"
#include "matrices.hpp"
#include "temp_folder.hpp"

namespace stanchion {
namespace {

void little(std::string& text, std::uint64_t value, int bytes) {
  for (int i = 0; i < bytes; ++i) text.push_back(static_cast<char>(i < 8 ? value >> (8 * i) & 0xff : 0));
}

/// A plain archive of stored members, without zip64.
std::string archive(const std::vector<std::pair<std::string, std::string>>& members) {
  std::string text, directory;
  for (const auto& [name, data] : members) {
    std::string common;
    little(common, 20, 2), little(common, 0, 8), little(common, crc32_of(0, data), 4);
    little(common, data.size(), 4), little(common, data.size(), 4), little(common, name.size(), 2),
        little(common, 0, 2);
    little(directory, 0x02014b50, 4), little(directory, 20, 2);
    directory += common;
    little(directory, 0, 10), little(directory, text.size(), 4);
    directory += name;
    little(text, 0x04034b50, 4);
    text += common + name + data;
  }
  const std::size_t start = text.size();
  text += directory;
  little(text, 0x06054b50, 4), little(text, 0, 4), little(text, members.size(), 2),
      little(text, members.size(), 2);
  little(text, directory.size(), 4), little(text, start, 4), little(text, 0, 2);
  return text;
}

std::string array(const std::string& type, const std::string& shape, const std::string& items,
                  int version = 1) {
  const std::string dictionary =
      "{'descr': '" + type + "', 'fortran_order': False, 'shape': " + shape + ", }\n";
  std::string text = "\x93NUMPY";
  little(text, static_cast<std::uint64_t>(version), 1), little(text, 0, 1);
  little(text, dictionary.size(), version == 1 ? 2 : 4);
  return text + dictionary + items;
}

template <class Item>
std::string bytes(std::initializer_list<Item> items) {
  return {reinterpret_cast<const char*>(items.begin()), items.size() * sizeof(Item)};
}

using Members = std::vector<std::pair<std::string, std::string>>;

/// [4 -1; -1 5] by coordinates; a member may be replaced.
Members coordinates(const std::string& name = {}, const std::string& data = {}) {
  Members members{{"format.npy", array("<U3", "()", std::string("c\0\0\0o\0\0\0o\0\0\0", 12))},
                  {"row.npy", array("<i8", "(4,)", bytes<std::int64_t>({0, 0, 1, 1}), 2)},
                  {"col.npy", array("<i4", "(4,)", bytes<std::int32_t>({0, 1, 0, 1}), 3)},
                  {"data.npy", array("<f8", "(4,)", bytes<double>({4, -1, -1, 5}))},
                  {"shape.npy", array("<i8", "(2,)", bytes<std::int64_t>({2, 2}))}};
  for (auto& member : members) {
    if (member.first == name) member.second = data;
  }
  return members;
}

std::string code_of(const Members& members) {
  return testing::read_text(archive(members)).status().code();
}

TEST(Npz, CoordinatesWithEveryTypeOfNumber) {
  const auto wanted = from_triplets(2, {{0, 0, 4}, {1, 0, -1}, {1, 1, 5}});
  const auto reads = [&](const std::string& type, const std::string& items) {
    const auto file = testing::read_text(archive(coordinates("data.npy", array(type, "(4,)", items))));
    EXPECT_TRUE(file.ok() && testing::same(file->matrix, wanted)) << type << file.status().to_string();
  };
  reads("<f8", bytes<double>({4, -1, -1, 5}));
  reads("<f4", bytes<float>({4, -1, -1, 5}));
  reads("<i8", bytes<std::int64_t>({4, -1, -1, 5}));
  reads("<i4", bytes<std::int32_t>({4, -1, -1, 5}));
  reads("<i2", bytes<std::int16_t>({4, -1, -1, 5}));
  reads("|i1", bytes<std::int8_t>({4, -1, -1, 5}));
  reads(">i2", std::string("\0\4\xff\xff\xff\xff\0\5", 8));
}

TEST(Npz, RefusalsNameWhatIsWrong) {
  EXPECT_EQ(code_of(coordinates("data.npy", array("<c16", "(4,)", std::string(64, '\0')))), "complex-matrix");
  EXPECT_EQ(code_of(coordinates("data.npy", array("|O", "(4,)", std::string(32, '\0')))), "bad-array");
  EXPECT_EQ(code_of(coordinates("data.npy", array("<f8", "(4,)", bytes<double>({4, -1, -1, 1.0 / 0.0})))),
            "not-finite");
  EXPECT_EQ(code_of(coordinates("data.npy",
                                array("<i8", "(4,)", bytes<std::int64_t>({4, -1, -1, (1LL << 60) + 1})))),
            "integer-rounds");
  EXPECT_EQ(code_of(coordinates("data.npy", array("<f8", "(5,)", bytes<double>({4, -1, -1, 5})))),
            "bad-array");
  EXPECT_EQ(code_of(coordinates("data.npy", array("<f8", "(2,2)", bytes<double>({4, -1, -1, 5})))),
            "wrong-count");
  EXPECT_EQ(code_of(coordinates("row.npy", array("<i8", "(3,)", bytes<std::int64_t>({0, 0, 1})))),
            "wrong-count");
  EXPECT_EQ(code_of(coordinates("row.npy", array("<i8", "(4,)", bytes<std::int64_t>({0, 0, 1, 1LL << 40})))),
            "index-out-of-range");
  EXPECT_EQ(code_of(coordinates("row.npy", array("<f8", "(4,)", bytes<double>({0, 0, 1, 1})))),
            "unsupported-type");
  EXPECT_EQ(code_of(coordinates("shape.npy", array("<i8", "(2,)", bytes<std::int64_t>({2, 3})))),
            "not-square");
  EXPECT_EQ(code_of(coordinates("format.npy", array("|S3", "()", "dia"))), "unsupported-format");
  EXPECT_EQ(code_of({{"arr_0.npy", array("<f8", "(1,)", bytes<double>({4}))}}), "missing-array");
  EXPECT_EQ(code_of({}), "missing-array");
}

TEST(Npz, AClaimedSizeIsHeldAgainstTheMemoryLimitAndTheArchive) {
  // Deflate cannot shrink so far: the claim is refused before anything is set aside.
  std::string text = archive(coordinates());
  const std::size_t entry = text.find("PK\1\2");
  text[entry + 10] = 8;
  for (std::size_t i = 0; i < 4; ++i) text[entry + 24 + i] = '\x7f';
  EXPECT_EQ(testing::read_text(text).status().code(), "damaged-zip");
  MatrixReadOptions options;
  options.memory_limit_bytes = 100;
  EXPECT_EQ(testing::read_text(archive(coordinates()), options).status().code(), "memory-limit");
}

TEST(Npz, CheckSumsAreHeldAgainstTheData) {
  std::string text = archive(coordinates());
  text[text.find("data.npy") + 8 + 80] ^= 1;
  EXPECT_EQ(testing::read_text(text).status().code(), "damaged-zip");
}

TEST(Gzip, SeveralMembersAndPaddingAreOneText) {
  const std::string path = std::string(STANCHION_DATA) + "/examples/gzip/valid.mtx.gz";
  const std::string one = testing::file_bytes(path);
  const auto twice = gunzip(one + one + std::string(100, '\0'), 1 << 20, "x");
  ASSERT_TRUE(twice.ok()) << twice.status().to_string();
  const auto once = gunzip(one, 1 << 20, "x");
  EXPECT_EQ(twice->size(), 2 * once->size());
  EXPECT_EQ(gunzip(one, once->size(), "x")->size(), once->size());
  EXPECT_EQ(gunzip(one, once->size() - 1, "x").status().code(), "memory-limit");
}

}  // namespace
}  // namespace stanchion
