// The deck: a text of cards, one a line. A keyword stands in columns 1 to 20, its values, separated by blanks, from
// column 21 on. Lines that are blank or begin with '*' are comments. The last card is END; what follows is not read.
// A line may end in CR LF. Every card of the table in deck.cc is needed once, unless it is marked there as optional;
// PROFILE and STEEL are given several times.
#pragma once

#include <string>
#include <string_view>
#include <variant>

#include "case.h"

namespace penstock {

struct DeckError {
  int line = 0;  // 1-based; the last line of the deck when something is missing
  std::string message;
};

std::variant<Case, DeckError> read_deck(std::string_view text);

}  // namespace penstock
