#include "io/csv.hpp"

#include <algorithm>

#include "io/detect.hpp"
#include "io/number.hpp"
#include "io/place.hpp"
#include "io/text_source.hpp"

namespace stanchion {

CsvReader::CsvReader(std::string_view text, const std::string& path, std::vector<CsvColumn> columns)
    : rest_(text), path_(path), columns_(std::move(columns)), position_(columns_.size(), -1) {}

std::string CsvReader::place() const {
  return at_line(path_, line_);
}

void CsvReader::fail(std::string code, std::string message, std::string remedy) {
  status_ = Status::bad_input(std::move(code), std::move(message), place(), std::move(remedy));
}

std::string CsvReader::columns_text() const {
  std::string text;
  for (const CsvColumn& column : columns_) {
    text += text.empty() ? "" : ",";
    text += column.required ? column.name : "[" + std::string(column.name) + "]";
  }
  return text;
}

bool CsvReader::next_line(std::string_view& line) {
  LineWalker walker(rest_, line_ + 1);
  while (walker.next(line)) {
    line = trimmed(line);
    if (line.empty() || line.front() == '#' || line.front() == '%') continue;
    line_ = walker.number();
    rest_ = walker.rest();
    return true;
  }
  line_ = walker.number();
  rest_ = {};
  return false;
}

bool CsvReader::split(std::string_view line) {
  split_.clear();
  unquoted_.clear();
  std::size_t at = 0;
  const auto is_separator = [this](char c) {
    return separator_ == 0 ? c == ' ' || c == '\t' : c == separator_;
  };
  for (;;) {
    while (at < line.size() && (line[at] == ' ' || line[at] == '\t') && line[at] != separator_) ++at;
    if (at < line.size() && line[at] == '"') {
      std::string field;
      for (++at; at < line.size(); ++at) {
        if (line[at] != '"') {
          field += line[at];
        } else if (at + 1 < line.size() && line[at + 1] == '"') {
          field += line[at++];
        } else {
          break;
        }
      }
      if (at == line.size()) {
        fail("open-quote", "a quoted field does not end in its line", "close the quote, or leave quotes out");
        return false;
      }
      ++at;
      unquoted_.push_back(std::move(field));
      split_.push_back(unquoted_.back());
      while (at < line.size() && !is_separator(line[at])) ++at;
    } else {
      const std::size_t begin = at;
      while (at < line.size() && !is_separator(line[at])) ++at;
      split_.push_back(trimmed(line.substr(begin, at - begin)));
    }
    if (at == line.size()) return true;
    ++at;
  }
}

/// Looks at the first record: its separator, and whether it is a header line.
bool CsvReader::start(std::string_view line) {
  started_ = true;
  separator_ = separator_of(line);
  if (separator_ == 0 && line.find('\t') != std::string_view::npos) separator_ = '\t';
  if (!split(line)) return false;
  for (std::size_t field = 0; field < split_.size(); ++field) {
    const std::string name = lower_case(split_[field]);
    for (std::size_t column = 0; column < columns_.size(); ++column) {
      if (name == columns_[column].name) position_[column] = static_cast<int>(field);
    }
  }
  // A record that starts like a number is data, even when a later field happens to be a column's name.
  const char lead = split_.front().empty() ? '0' : split_.front().front();
  const bool numeric = (lead >= '0' && lead <= '9') || lead == '-' || lead == '+' || lead == '.';
  has_header_ = !numeric && std::any_of(position_.begin(), position_.end(), [](int at) { return at >= 0; });
  for (std::size_t column = 0; column < columns_.size(); ++column) {
    if (!has_header_) position_[column] = static_cast<int>(column);
    if (has_header_ && columns_[column].required && position_[column] < 0) {
      fail("missing-column", std::string("the header line has no column \"") + columns_[column].name + "\"",
           "give the columns " + columns_text());
      return false;
    }
  }
  return true;
}

bool CsvReader::next(std::vector<std::string_view>& fields) {
  std::string_view line;
  if (!status_.ok() || !next_line(line)) return false;
  if (!started_) {
    if (!start(line)) return false;
    if (has_header_ && !next_line(line)) return false;
  }
  if (!split(line)) return false;
  fields.assign(columns_.size(), {});
  for (std::size_t column = 0; column < columns_.size(); ++column) {
    const int at = position_[column];
    if (at >= 0 && at < static_cast<int>(split_.size())) {
      fields[column] = split_[static_cast<std::size_t>(at)];
    } else if (columns_[column].required) {
      fail("missing-field", std::string("the line has no ") + columns_[column].name,
           "each line must be: " + columns_text());
      return false;
    }
  }
  if (!has_header_ && split_.size() > columns_.size()) {
    fail("extra-text", "the line has " + std::to_string(split_.size()) + " fields",
         "each line must be: " + columns_text() + "; other columns need a header line");
    return false;
  }
  return true;
}

bool CsvReader::whole(std::string_view field, const char* what, Offset& value) {
  const char* p = field.data();
  const char* const end = p + field.size();
  if (scan_whole(p, end, value) == NumberFault::kNone && p == end) return true;
  fail("bad-number", "\"" + excerpt(field) + "\" is not a whole number, where " + what + " should be",
       "each line must be: " + columns_text());
  return false;
}

bool CsvReader::real(std::string_view field, const char* what, double& value) {
  const char* p = field.data();
  const char* const end = p + field.size();
  const NumberFault fault = scan_real(p, end, value);
  if (fault == NumberFault::kNone && p == end) return true;
  const bool not_finite = fault == NumberFault::kNotFinite;
  if (fault == NumberFault::kUnderflow) {
    fail("number-underflow",
         "\"" + excerpt(field) + "\" is not zero, but smaller than any double-precision number, where " +
             what + " should be",
         "write 0 if zero is meant, or choose other units");
    return false;
  }
  fail(fault == NumberFault::kOverflow ? "number-overflow"
       : not_finite                    ? "not-finite"
                                       : "bad-number",
       "\"" + excerpt(field) + "\" is not a " + (not_finite ? "finite number" : "number") + ", where " +
           what + " should be",
       "each line must be: " + columns_text() + ", with decimal points");
  return false;
}

std::string csv_field(const std::string& text) {
  if (text.find_first_of(",;\"\t ") == std::string::npos) return text;
  std::string quoted = "\"";
  for (const char c : text) {
    if (c == '"') quoted += '"';
    quoted += c;
  }
  return quoted + '"';
}

}  // namespace stanchion
