// A table in plain text: columns aligned, numbers to the right.
#pragma once

#include <string>
#include <string_view>
#include <vector>

namespace drover::screen {

enum class Align { kLeft, kRight };

class Table {
 public:
  // A table whose titles are all empty has no head line.
  struct Column {
    std::string title;
    Align align = Align::kLeft;
  };
  explicit Table(std::vector<Column> columns) : columns_(std::move(columns)) {}

  // One cell a column; missing ones are empty, further ones are dropped. Control characters are shown as escapes.
  void add(std::vector<std::string> cells);

  // Every line ends with '\n'; two spaces between columns, `indent` before them, no spaces at the end.
  std::string text(int indent = 0) const;
  bool empty() const { return rows_.empty(); }

 private:
  std::string line(const std::vector<std::string>& cells, const std::vector<std::size_t>& widths, int indent) const;

  std::vector<Column> columns_;
  std::vector<std::vector<std::string>> rows_;
};

// Characters of a text in UTF-8, which is how wide most of them make it.
std::size_t width(std::string_view text);

}  // namespace drover::screen
