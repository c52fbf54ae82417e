#include "tools/leat/verbs.hpp"

namespace leat {

}  // namespace leat
