#pragma once

#include <string>
#include <string_view>

#include "stillmass/report/chart.hpp"

#include "report/json_text.hpp"
#include "report/looks.hpp"

namespace stillmass::report {

/// Text for the chart library, which reads a little HTML: & < > as entities.
std::string plain(std::string_view text);
/// The same for a template of the cursor read-out, where % begins a field.
std::string plain_in_template(std::string_view text);

/// "role:ROLE" or "role:ROLE/0.2": page.js puts the colour of the scheme in its place.
std::string colour(std::string_view role);
std::string colour(std::string_view role, double opacity);

/// "y", "y2", ...; for keys of the layout "yaxis", "yaxis2", ...
std::string axis_name(std::size_t panel);
std::string axis_key(std::size_t panel);

/// The key "font" with its object.
void write_font(JsonText& json, double size, std::string_view role);

/// The chart library wants ranges and places of annotations on a logarithmic axis as powers of ten.
double on_axis(const Axis& axis, double value);
/// A logarithmic axis has no place for values <= 0.
bool has_place(const Axis& axis, double value);

/// The traces of all panels as elements of an open array. Gives the numbers of those that are heat maps on a
/// logarithmic scale (page.js takes the logarithm, so that the JSON keeps the values that the cursor shows).
std::vector<int> write_traces(JsonText& json, const Chart& chart, const Looks& looks);

/// The layout as one object.
void write_layout(JsonText& json, const Chart& chart, const Looks& looks);

/// Parts of the layout: the keys of the axes; labels and callouts as elements of an open array.
void write_axes(JsonText& json, const Chart& chart);
void write_notes(JsonText& json, const Chart& chart);

/// Height on the screen in CSS pixels, and the part of it that a panel has.
double screen_height(const Chart& chart);
double share_of_height(const Chart& chart, std::size_t panel);
/// Room to the right of the panels, for the names of zones.
double right_margin(const Chart& chart);

}  // namespace stillmass::report
