#include "stillmass/base/digest.hpp"

#include <array>
#include <cstdint>
#include <fstream>

#include <nettle/sha2.h>

#include "stillmass/base/error.hpp"

namespace stillmass::base {
namespace {

std::string hexadecimal(sha256_ctx& state) {
  std::array<std::uint8_t, SHA256_DIGEST_SIZE> digest{};
  sha256_digest(&state, digest.size(), digest.data());
  static constexpr std::string_view digits = "0123456789abcdef";
  std::string text;
  for (const std::uint8_t byte : digest) {
    text.push_back(digits[byte >> 4]);
    text.push_back(digits[byte & 15]);
  }
  return text;
}

void update(sha256_ctx& state, const char* data, std::size_t size) {
  sha256_update(&state, size, reinterpret_cast<const std::uint8_t*>(data));
}

}  // namespace

std::string sha256(std::string_view bytes) {
  sha256_ctx state;
  sha256_init(&state);
  update(state, bytes.data(), bytes.size());
  return hexadecimal(state);
}

std::string sha256_of_file(const std::filesystem::path& file) {
  std::ifstream in(file, std::ios::binary);
  if (!in) throw file_error(file.string(), "cannot be read");
  sha256_ctx state;
  sha256_init(&state);
  std::array<char, 65536> block{};
  while (in.read(block.data(), block.size()), in.gcount() > 0) {
    update(state, block.data(), static_cast<std::size_t>(in.gcount()));
  }
  if (in.bad()) throw file_error(file.string(), "cannot be read to its end");
  return hexadecimal(state);
}

}  // namespace stillmass::base
