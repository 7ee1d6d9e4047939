// The part of JSON Schema (draft 2020-12, json-schema.org) that docs/result.schema.json uses.
#pragma once

#include <nlohmann/json.hpp>

#include <string>
#include <vector>

namespace trotline::testing_room {

class SchemaCheck {
 public:
  explicit SchemaCheck(nlohmann::json schema) : schema_(std::move(schema)) {}

  /// What is wrong with the document, a line each; empty when it is valid.
  [[nodiscard]] std::vector<std::string> complaints(const nlohmann::json& document) {
    complaints_.clear();
    check(document, schema_, "");
    return complaints_;
  }

 private:
  void check(const nlohmann::json& value, const nlohmann::json& schema, const std::string& at) {
    if (schema.contains("$ref")) {
      const std::string ref = schema["$ref"];
      check(value, schema_.at(nlohmann::json::json_pointer(ref.substr(1))), at);
      return;  // beside a $ref the file keeps descriptions only
    }
    if (schema.contains("type")) check_type(value, schema["type"], at);
    if (schema.contains("const") && value != schema["const"]) complain(at, "is not the constant");
    if (schema.contains("enum")) check_enum(value, schema["enum"], at);
    if (value.is_number()) check_range(value, schema, at);
    if (value.is_object()) check_object(value, schema, at);
    if (value.is_array() && schema.contains("items")) {
      for (std::size_t i = 0; i < value.size(); ++i)
        check(value[i], schema["items"], at + "/" + std::to_string(i));
    }
  }

  static bool has_type(const nlohmann::json& value, const std::string& type) {
    if (type == "null") return value.is_null();
    if (type == "string") return value.is_string();
    if (type == "boolean") return value.is_boolean();
    if (type == "integer") return value.is_number_integer();
    if (type == "number") return value.is_number();
    if (type == "array") return value.is_array();
    return type == "object" && value.is_object();
  }

  void check_type(const nlohmann::json& value, const nlohmann::json& type, const std::string& at) {
    bool any = false;
    for (const auto& name : type.is_array() ? type : nlohmann::json::array({type}))
      any |= has_type(value, name);
    if (!any) complain(at, std::string("is ") + value.type_name() + ", not " + type.dump());
  }

  void check_enum(const nlohmann::json& value, const nlohmann::json& choices, const std::string& at) {
    for (const auto& choice : choices) {
      if (choice == value) return;
    }
    complain(at, "is none of " + choices.dump());
  }

  void check_range(const nlohmann::json& value, const nlohmann::json& schema, const std::string& at) {
    if (schema.contains("minimum") && value < schema["minimum"]) complain(at, "is too small");
    if (schema.contains("maximum") && value > schema["maximum"]) complain(at, "is too large");
  }

  void check_object(const nlohmann::json& value, const nlohmann::json& schema, const std::string& at) {
    for (const auto& key : schema.value("required", nlohmann::json::array())) {
      if (!value.contains(key.get<std::string>())) complain(at + "/" + key.get<std::string>(), "is missing");
    }
    const nlohmann::json properties = schema.value("properties", nlohmann::json::object());
    for (const auto& [key, child] : value.items()) {
      if (properties.contains(key)) {
        check(child, properties[key], at + "/" + key);
      } else if (schema.contains("additionalProperties")) {
        check(child, schema["additionalProperties"], at + "/" + key);
      } else {
        complain(at + "/" + key, "is not documented");  // stricter than the standard: docs hold every key
      }
    }
  }

  void complain(const std::string& at, const std::string& what) { complaints_.push_back(at + ": " + what); }

  nlohmann::json schema_;
  std::vector<std::string> complaints_;
};

}  // namespace trotline::testing_room
