// Where a coordinator listens and is found.
#pragma once

#include <string>
#include <string_view>

#include "absl/status/status.h"
#include "absl/status/statusor.h"

namespace drover::link {

// "unix:/absolute/path" or "host:port" ("[::1]:7777" for an IPv6 address; port 0: any free one, to listen only).
struct Address {
  bool is_unix = false;
  std::string path;  // of a Unix socket; absolute
  std::string host;  // of a TCP address, without brackets
  int port = 0;      // 0 to 65535

  // INVALID_ARGUMENT, in words: neither form, a port out of range, a relative path, a path longer than a socket's
  // name may be (107 bytes).
  static absl::StatusOr<Address> parse(std::string_view text);
  std::string text() const;  // as parse() reads it
  // Whether only this machine can reach it: a Unix socket, 127.0.0.0/8, ::1 or localhost.
  bool is_local() const;
};

// The socket a coordinator opens and a client looks for when nobody says otherwise: in $XDG_RUNTIME_DIR/drover, else
// in /tmp/drover-<user id>.
std::string default_address();

// Makes the folder of a Unix socket with mode 0700, or checks that it is ours and closed to others:
// FAILED_PRECONDITION, in words, when it is not (another owner, open to group or others, a symbolic link).
absl::Status prepare_socket_folder(const Address& address);

}  // namespace drover::link
