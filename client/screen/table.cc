#include "screen/table.h"

#include <algorithm>
#include <utility>

#include "link/text.h"

namespace drover::screen {

std::size_t width(std::string_view text) {
  return static_cast<std::size_t>(
      std::count_if(text.begin(), text.end(), [](char c) { return (static_cast<unsigned char>(c) & 0xC0) != 0x80; }));
}

void Table::add(std::vector<std::string> cells) {
  cells.resize(columns_.size());
  for (std::string& cell : cells) cell = link::printable(cell);
  rows_.push_back(std::move(cells));
}

std::string Table::line(const std::vector<std::string>& cells, const std::vector<std::size_t>& widths,
                        int indent) const {
  std::string out(static_cast<std::size_t>(indent), ' ');
  for (std::size_t i = 0; i < cells.size(); ++i) {
    const std::string gap(widths[i] - width(cells[i]), ' ');
    if (i > 0) out += "  ";
    out += columns_[i].align == Align::kRight ? gap + cells[i] : cells[i] + gap;
  }
  out.erase(out.find_last_not_of(' ') + 1);
  return out + "\n";
}

std::string Table::text(int indent) const {
  std::vector<std::string> titles;
  std::vector<std::size_t> widths;
  for (std::size_t i = 0; i < columns_.size(); ++i) {
    titles.push_back(columns_[i].title);
    widths.push_back(width(titles.back()));
    for (const auto& row : rows_) widths.back() = std::max(widths.back(), width(row[i]));
  }
  const bool head = std::any_of(titles.begin(), titles.end(), [](const std::string& title) { return !title.empty(); });
  std::string out = head ? line(titles, widths, indent) : "";
  for (const auto& row : rows_) out += line(row, widths, indent);
  return out;
}

}  // namespace drover::screen
