// Harwell-Boeing and Rutherford-Boeing files (I. S. Duff, R. G. Grimes, J. G. Lewis, The Rutherford-Boeing
// Sparse Matrix Collection, 1997). The two differ, for assembled matrices, in the words of the header only.
#include <vector>

#include "io/boeing_header.hpp"
#include "io/entry_text.hpp"
#include "io/matrix_formats.hpp"
#include "io/place.hpp"

namespace stanchion {
namespace {

class BoeingReader {
 public:
  explicit BoeingReader(const ReadTask& task) : task_(task), walker_(task.source.text()) {}

  Result<RawMatrix> read() {
    auto header = read_boeing_header(walker_, task_.path());
    if (!header.ok()) return header.status();
    header_ = std::move(*header);
    const auto rows = static_cast<Index>(header_.rows);
    const Offset entries = header_.entries;
    if (Status status = check_memory(rows, entries, task_.most_bytes, task_.path()); !status.ok())
      return status;
    if (Status status = check_room(); !status.ok()) return status;

    Buffer<Offset> start(Offset{rows} + 1);
    Status status = read_wholes(header_.pointers, header_.pointer_lines, Offset{rows} + 1, "column pointer",
                                1, entries + 1, [&](Offset at, Offset value) { start[at] = value - 1; });
    if (!status.ok()) return status;
    if (status = check_pointers(start); !status.ok()) return status;
    RawMatrix raw;
    raw.rows = rows;
    raw.entries = EntryList(entries);
    status =
        read_wholes(header_.indices, header_.index_lines, entries, "row number", 1, rows,
                    [&](Offset at, Offset value) { raw.entries.row[at] = static_cast<Index>(value - 1); });
    if (!status.ok()) return status;
    if (status = read_values(raw.entries.value); !status.ok()) return status;
    for (Index column = 0; column < rows; ++column) {
      for (Offset k = start[column]; k < start[Offset{column} + 1]; ++k) {
        raw.entries.set(k, raw.entries.row[k], column, raw.entries.value[k]);
      }
    }
    raw.declared_symmetric = header_.type[1] == 's';
    raw.format = "Rutherford-Boeing or Harwell-Boeing, type " + header_.type;
    const std::string_view text = task_.source.text();
    if (header_.right_side_lines == 0) {
      warn_unfinished_line(text.empty() || text.back() == '\n', task_.path(), raw.warnings);
    }
    return raw;
  }

 private:
  /// Announced sizes must fit into the text before memory is set aside for them.
  Status check_room() const {
    const auto text = static_cast<Offset>(walker_.rest().size());
    if (header_.rows + header_.entries <= text) return {};
    return Status::bad_input("truncated-file", "the file is shorter than its header announces",
                             at_line(task_.path(), walker_.number()), "write or transfer the file again");
  }

  /// The lines of one section, in blocks that threads take; false when the file ends first.
  struct Block {
    std::vector<std::string_view> lines;
    Offset first_line = 0, first_item = 0;
    Status fault;
  };

  Status take_section(const FortranFormat& format, Offset line_count, Offset items, const char* what,
                      std::vector<Block>& blocks) {
    const Offset needed = (items + format.per_line - 1) / format.per_line;
    if (needed != line_count && !(items == 0 && line_count <= 1)) {
      return Status::bad_input("wrong-count",
                               std::to_string(line_count) + " lines are announced for " +
                                   std::to_string(items) + " " + what + "s, the format asks for " +
                                   std::to_string(needed),
                               at_line(task_.path(), 2), "correct the line counts or the Fortran format");
    }
    constexpr Offset kLinesPerBlock = 8192;
    for (Offset taken = 0; taken < line_count; ++taken) {
      if (taken % kLinesPerBlock == 0) {
        blocks.push_back({});
        blocks.back().first_line = walker_.number() + 1;
        blocks.back().first_item = taken * format.per_line;
      }
      std::string_view line;
      if (!walker_.next(line)) return boeing_truncated(walker_, task_.path());
      blocks.back().lines.push_back(line);
    }
    return {};
  }

  /// Calls `take_item(line, field, item)` for every item, on all threads; the first fault in the file counts.
  template <class TakeItem>
  Status read_section(const FortranFormat& format, Offset line_count, Offset items, const char* what,
                      const TakeItem& take_item) {
    std::vector<Block> blocks;
    if (Status status = take_section(format, line_count, items, what, blocks); !status.ok()) return status;
    task_.pool.run(static_cast<Offset>(blocks.size()), [&](Offset number, int) {
      Block& block = blocks[static_cast<std::size_t>(number)];
      Offset item = block.first_item;
      for (std::size_t i = 0; i < block.lines.size() && block.fault.ok(); ++i) {
        for (int field = 0; field < format.per_line && item < items && block.fault.ok(); ++field, ++item) {
          block.fault = take_item(block.lines[i], field, item, block.first_line + static_cast<Offset>(i));
        }
      }
    });
    for (const Block& block : blocks) {
      if (!block.fault.ok()) return block.fault;
    }
    return {};
  }

  template <class Store>
  Status read_wholes(const FortranFormat& format, Offset line_count, Offset items, const char* what,
                     Offset least, Offset most, const Store& store) {
    return read_section(
        format, line_count, items, what, [&](std::string_view line, int field, Offset item, Offset at) {
          Offset value = 0;
          const NumberFault fault = read_fortran_whole(line, field, format, value);
          if (fault == NumberFault::kNone && value >= least && value <= most) {
            store(item, value);
            return Status();
          }
          const std::string name = std::string(what) + " " + std::to_string(item + 1);
          if (fault == NumberFault::kNone || fault == NumberFault::kOverflow) {
            return Status::bad_input(
                "index-out-of-range",
                name + " is outside " + std::to_string(least) + " to " + std::to_string(most),
                at_line(task_.path(), at), "write or transfer the file again");
          }
          return Status::bad_input(
              "bad-number", name + " is not a whole number (field " + std::to_string(field + 1) + ")",
              at_line(task_.path(), at), "check that the columns match the Fortran format");
        });
  }

  Status read_values(Buffer<double>& values) {
    const FortranFormat& format = header_.values;
    return read_section(
        format, header_.value_lines, header_.entries, "value",
        [&](std::string_view line, int field, Offset item, Offset at) {
          double value = 0;
          NumberFault fault = NumberFault::kNone;
          if (format.real) {
            fault = read_fortran_real(line, field, format, value);
          } else {
            Offset whole = 0;
            fault = read_fortran_whole(line, field, format, whole);
            value = static_cast<double>(whole);
          }
          if (fault == NumberFault::kNone) {
            values[item] = value;
            return Status();
          }
          const std::string name = "value " + std::to_string(item + 1);
          const std::string place = at_line(task_.path(), at);
          if (fault == NumberFault::kOverflow && !format.real) {
            return Status::bad_input("integer-rounds", name + " is a whole number that would be rounded",
                                     place, "scale the matrix, or write the values as reals");
          }
          if (fault == NumberFault::kOverflow) {
            return Status::bad_input("number-overflow", name + " is larger than any double-precision number",
                                     place, "check the value");
          }
          if (fault == NumberFault::kUnderflow) {
            return Status::bad_input("number-underflow",
                                     name + " is not zero, but smaller than any double-precision number",
                                     place, "write 0 if zero is meant, or choose other units");
          }
          if (fault == NumberFault::kNotFinite) {
            return Status::bad_input(
                "not-finite", name + " is not a finite number", place,
                "find the element that produced it: often one of zero length or zero area");
          }
          return Status::bad_input("bad-number",
                                   name + " is not a number (field " + std::to_string(field + 1) + ")", place,
                                   "check that the columns match the Fortran format");
        });
  }

  Status check_pointers(const Buffer<Offset>& start) const {
    for (Offset column = 0; column + 1 < start.size(); ++column) {
      if (start[column] <= start[column + 1]) continue;
      return Status::bad_input("bad-pointers",
                               "the column pointers fall after column " + std::to_string(column + 1),
                               task_.path(), "write or transfer the file again");
    }
    if (start[0] == 0 && start[start.size() - 1] == header_.entries) return {};
    return Status::bad_input(
        "bad-pointers", "the column pointers do not run from 1 to " + std::to_string(header_.entries + 1),
        task_.path(), "write or transfer the file again");
  }

  const ReadTask& task_;
  LineWalker walker_;
  BoeingHeader header_;
};

}  // namespace

Result<RawMatrix> read_boeing(const ReadTask& task) {
  return BoeingReader(task).read();
}

}  // namespace stanchion
