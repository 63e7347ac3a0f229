#include "lagscape/base/error.h"

namespace lagscape {

Error::Error(ErrorKind kind, std::string problem, std::string where, std::string fix)
    : kind_(kind), problem_(std::move(problem)), where_(std::move(where)), fix_(std::move(fix)) {
  text_ = "error: " + problem_;
  if (!where_.empty()) text_ += "\n  where: " + where_;
  if (!fix_.empty()) text_ += "\n  fix:   " + fix_;
}

}  // namespace lagscape
