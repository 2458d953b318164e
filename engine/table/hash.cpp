#include "table/hash.hpp"

#include "table/bytes.hpp"

#include <openssl/evp.h>

#include <fstream>
#include <memory>
#include <stdexcept>
#include <vector>

namespace formsieve::table {

namespace {

constexpr std::size_t kHashPieceBytes = std::size_t{1} << 20;

/// One running digest. Throws std::runtime_error when the library refuses, which only a broken installation brings
/// about.
class Sha256 {
 public:
  Sha256() : context_(EVP_MD_CTX_new(), &EVP_MD_CTX_free) {
    require(context_ != nullptr && EVP_DigestInit_ex(context_.get(), EVP_sha256(), nullptr) == 1);
  }

  void add(std::string_view bytes) { require(EVP_DigestUpdate(context_.get(), bytes.data(), bytes.size()) == 1); }

  std::string finish() {
    unsigned char digest[EVP_MAX_MD_SIZE];
    unsigned length = 0;
    require(EVP_DigestFinal_ex(context_.get(), digest, &length) == 1);
    constexpr char kDigits[] = "0123456789abcdef";
    std::string text;
    for (unsigned i = 0; i < length; ++i) {
      text += kDigits[digest[i] >> 4];
      text += kDigits[digest[i] & 15];
    }
    return text;
  }

 private:
  static void require(bool done) {
    if (!done) throw std::runtime_error("SHA-256 is not available from the cryptographic library");
  }

  std::unique_ptr<EVP_MD_CTX, decltype(&EVP_MD_CTX_free)> context_;
};

}  // namespace

std::string sha256_hex(std::string_view bytes) {
  Sha256 digest;
  digest.add(bytes);
  return digest.finish();
}

Result<std::string> sha256_hex_of_file(const std::string& path) {
  if (const Status status = check_file(path); !status) return status.error();
  std::ifstream file(path, std::ios::binary);
  Sha256 digest;
  std::vector<char> piece(kHashPieceBytes);
  while (file) {
    file.read(piece.data(), static_cast<std::streamsize>(piece.size()));
    digest.add({piece.data(), static_cast<std::size_t>(file.gcount())});
  }
  if (!file.eof()) return Error{ErrorKind::io, "the file cannot be read", path, "Check the disk that holds it"};
  return digest.finish();
}

}  // namespace formsieve::table
