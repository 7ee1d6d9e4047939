// Tables with one spectrum a row: the SDFITS convention of the registry of FITS conventions (Garwood 2000,
// ASP Conf. 216, 243). Every keyword of the header may be a column, and the column counts.
#include <array>

#include <trotline/base/text.hpp>

#include "spectrum_reader.hpp"

namespace trotline {
namespace {

constexpr double kNaN = std::numeric_limits<double>::quiet_NaN();

/// The keywords that describe a spectrum; those of axes 1 to 4 come in addition.
const std::vector<std::string>& plain_keywords() {
  static const std::vector<std::string> kNames = {
      "OBJECT",   "RESTFRQ",  "RESTFREQ", "RESTWAV",  "SPECSYS",  "VELREF",   "VELDEF",
      "VFRAME",   "RADESYS",  "RADECSYS", "EQUINOX",  "EPOCH",    "RA",       "DEC",
      "DATE-OBS", "DATE-AVG", "MJD-OBS",  "MJD-AVG",  "OBSGEO-X", "OBSGEO-Y", "OBSGEO-Z",
      "OBSGEO-L", "OBSGEO-B", "OBSGEO-H", "SITELONG", "SITELAT",  "SITEELEV", "FREQRES",
      "BEAMEFF",  "FORWEFF",  "BMAJ",     "BMIN",     "BUNIT"};
  return kNames;
}

std::vector<std::string> all_keywords() {
  std::vector<std::string> names = plain_keywords();
  for (const char* stem : {"CTYPE", "CRVAL", "CDELT", "CRPIX", "CUNIT"}) {
    for (int i = 1; i <= 4; ++i) names.push_back(fmt::format("{}{}", stem, i));
  }
  return names;
}

}  // namespace

SpectrumTable::SpectrumTable(const FitsFile& file, int unit, std::string where)
    : file_(file), unit_(unit), where_(std::move(where)) {
  int status = 0;
  LONGLONG rows = 0;
  fits_get_num_rowsll(file_.handle(), &rows, &status);
  file_.check(status, "the rows of a table cannot be counted");
  rows_ = static_cast<std::size_t>(std::max<LONGLONG>(rows, 0));
  for (const char* name : {"DATA", "SPECTRUM", "SERIES"}) {
    if (data_column_ == 0) data_column_ = column_named(name);
  }
  if (data_column_ > 0) find_columns();
}

int SpectrumTable::column_named(const std::string& name) const {
  int status = 0;
  int column = 0;
  std::string copy = name;
  fits_get_colnum(file_.handle(), CASEINSEN, copy.data(), &column, &status);
  fits_clear_errmsg();
  return status == 0 ? column : 0;
}

void SpectrumTable::find_columns() {
  int status = 0;
  int code = 0;
  long repeat = 0;
  long width = 0;
  fits_get_eqcoltype(file_.handle(), data_column_, &code, &repeat, &width, &status);
  file_.check(status, "the column of spectra has no readable type");
  const bool is_number = code == TBYTE || code == TSBYTE || code == TSHORT || code == TUSHORT ||
                         code == TINT || code == TLONG || code == TULONG || code == TLONGLONG ||
                         code == TFLOAT || code == TDOUBLE;
  if (!is_number || repeat < 1) {
    throw InputError(Place{where_},
                     {fmt::format("column {} of the table does not hold arrays of numbers", data_column_),
                      "one spectrum of fixed length a row"});
  }
  channels_ = static_cast<std::size_t>(repeat);
  require_one_spectrum_a_row();
  for (const char* name : {"FLAGS", "MASK"}) {
    if (mask_column_ == 0) mask_column_ = column_named(name);
  }
  const HeaderCards header(file_.structure()[static_cast<std::size_t>(unit_) - 1].header, where_);
  for (const std::string& keyword : all_keywords()) {
    const int column = column_named(keyword);
    if (column == 0) {
      shared_cards_ += header.card(keyword);
      continue;
    }
    int type = 0;
    long count = 0;
    long bytes = 0;
    fits_get_eqcoltype(file_.handle(), column, &type, &count, &bytes, &status);
    file_.check(status, "a column has no readable type");
    if (type > 0 && type != TCOMPLEX && type != TDBLCOMPLEX)
      virtual_columns_.push_back({keyword, column, type == TSTRING});
  }
  const std::string unit_keyword = fmt::format("TUNIT{}", data_column_);
  if (const auto unit = header.text(unit_keyword)) shared_cards_ += text_card("TUNIT", *unit);
}

/// TDIMn may give the spectra degenerate axes of position and polarisation, but no more than one spectrum a
/// row.
void SpectrumTable::require_one_spectrum_a_row() const {
  const HeaderCards header(file_.structure()[static_cast<std::size_t>(unit_) - 1].header, where_);
  const std::string keyword = fmt::format("TDIM{}", data_column_);
  const auto shape = header.text(keyword);
  if (!shape) return;
  std::string_view rest = trimmed(*shape);
  const bool parenthesised = rest.starts_with('(') && rest.ends_with(')');
  std::size_t longer_than_one = 0;
  long long values = 1;
  rest = parenthesised ? rest.substr(1, rest.size() - 2) : std::string_view{};
  while (!rest.empty()) {
    const std::size_t end = std::min(rest.find(','), rest.size());
    const long long length = parse_whole_number(rest.substr(0, end)).value_or(0);
    longer_than_one += length != 1 ? 1 : 0;
    values = length < 1 || values > (1LL << 40) / length ? 0 : values * length;
    rest.remove_prefix(std::min(end + 1, rest.size()));
  }
  if (longer_than_one <= 1 && values == static_cast<long long>(channels_)) return;
  header.refuse(fmt::format("keyword {} is '{}' for {} values a row", keyword, printable(*shape), channels_),
                "the shape of one spectrum");
}

std::string SpectrumTable::cell_card(const VirtualColumn& column, std::size_t row) const {
  int status = 0;
  int any = 0;
  const auto at = static_cast<LONGLONG>(row) + 1;
  if (!column.is_text) {
    double value = kNaN;
    double hole = kNaN;
    fits_read_col(file_.handle(), TDOUBLE, column.column, at, 1, 1, &hole, &value, &any, &status);
    file_.check(status, fmt::format("column {} cannot be read", column.keyword));
    return std::isnan(value) ? std::string{} : number_card(column.keyword, value);
  }
  int width = 0;
  fits_get_col_display_width(file_.handle(), column.column, &width, &status);
  file_.check(status, fmt::format("column {} cannot be read", column.keyword));
  std::string buffer(static_cast<std::size_t>(width) + 1, '\0');
  char* text = buffer.data();
  std::string none(1, '\0');
  fits_read_col(file_.handle(), TSTRING, column.column, at, 1, 1, none.data(), &text, &any, &status);
  file_.check(status, fmt::format("column {} cannot be read", column.keyword));
  const std::string cell = printable(buffer.c_str());
  return trimmed(cell).empty() ? std::string{} : text_card(column.keyword, trimmed(cell));
}

std::string SpectrumTable::header_of_row(std::size_t row) const {
  std::string cards = number_card("NAXIS", 4) + number_card("NAXIS1", static_cast<double>(channels_));
  for (int i = 2; i <= 4; ++i) cards += number_card(fmt::format("NAXIS{}", i), 1);
  cards += shared_cards_;
  for (const VirtualColumn& column : virtual_columns_) cards += cell_card(column, row);
  return cards;
}

void SpectrumTable::read_data(std::size_t row, Spectrum& spectrum) const {
  const auto at = static_cast<LONGLONG>(row) + 1;
  const auto count = static_cast<LONGLONG>(channels_);
  spectrum.intensity.resize(count);
  int status = 0;
  int any = 0;
  double hole = kNaN;
  fits_read_col(file_.handle(), TDOUBLE, data_column_, at, 1, count, &hole, spectrum.intensity.data(), &any,
                &status);
  file_.check(status, "the column of spectra cannot be read");
  make_holes_of_infinities(spectrum.intensity);
  if (mask_column_ == 0) return;
  int code = 0;
  long repeat = 0;
  long width = 0;
  fits_get_coltype(file_.handle(), mask_column_, &code, &repeat, &width, &status);
  if (status != 0 || static_cast<LONGLONG>(repeat) != count || code == TSTRING || code < 0) {
    fits_clear_errmsg();
    spectrum.warnings.emplace_back(
        "the column of flags has another length than the spectra and was passed over");
    return;
  }
  Eigen::ArrayXd mask(count);
  fits_read_col(file_.handle(), TDOUBLE, mask_column_, at, 1, count, &hole, mask.data(), &any, &status);
  file_.check(status, "the column of flags cannot be read");
  spectrum.intensity = (mask == 0.0).select(spectrum.intensity, kNaN);
}

Spectrum SpectrumTable::read(std::size_t row, const SpectrumOptions& options) {
  const std::string text = header_of_row(row);
  const HeaderCards cards(text, fmt::format("{}, row {}", where_, row + 1));
  if (text != last_cards_) {
    last_axis_ = read_spectral_axis(text, cards.where(), options.axis);
    last_cards_ = text;
  }
  if (last_axis_.fits_axis != 1) {
    cards.refuse(fmt::format("the spectral axis is number {}", last_axis_.fits_axis),
                 "the first axis of the spectra, CTYPE1");
  }
  Spectrum spectrum;
  spectrum.name = cards.where();
  spectrum.axis = last_axis_.axis;
  spectrum.axis_type = last_axis_.type;
  spectrum.frame = last_axis_.frame;
  spectrum.rest_frequency_hz = last_axis_.rest_frequency_hz;
  spectrum.warnings = last_axis_.warnings;
  read_data(row, spectrum);
  const auto unit = cards.text("TUNIT");
  apply_unit(unit ? unit : cards.text("BUNIT"), options, cards.where(), spectrum);
  read_common_keywords(cards, spectrum);
  return spectrum;
}

}  // namespace trotline
