package main

import (
	"encoding/json"
	"reflect"
	"strings"
)

// orderedField is one member of a JSON object whose order is kept.
type orderedField struct {
	name  string
	value any
}

// orderedObject marshals its members in the order given, so that JSON follows
// the order of the struct it came from.
type orderedObject []orderedField

func (o orderedObject) MarshalJSON() ([]byte, error) {
	b := []byte{'{'}
	for i, f := range o {
		if i > 0 {
			b = append(b, ',')
		}
		k, err := json.Marshal(f.name)
		if err != nil {
			return nil, err
		}
		v, err := json.Marshal(f.value)
		if err != nil {
			return nil, err
		}
		b = append(append(append(b, k...), ':'), v...)
	}
	return append(b, '}'), nil
}

func finiteValue(v any) any {
	if v == nil {
		return nil
	}
	if m, ok := v.(json.Marshaler); ok {
		return m
	}
	return finiteReflect(reflect.ValueOf(v))
}

func finiteReflect(r reflect.Value) any {
	switch r.Kind() {
	case reflect.Float64, reflect.Float32:
		if !isFinite(r.Float()) {
			return nil
		}
		return r.Float()
	case reflect.Pointer, reflect.Interface:
		if r.IsNil() {
			return nil
		}
		return finiteValue(r.Elem().Interface())
	case reflect.Slice, reflect.Array:
		if r.Kind() == reflect.Slice && r.IsNil() {
			return []any{}
		}
		out := make([]any, r.Len())
		for i := range out {
			out[i] = finiteValue(r.Index(i).Interface())
		}
		return out
	case reflect.Map:
		if r.IsNil() {
			return map[string]any{}
		}
		out := make(map[string]any, r.Len())
		for _, k := range r.MapKeys() {
			out[k.String()] = finiteValue(r.MapIndex(k).Interface())
		}
		return out
	case reflect.Struct:
		return finiteStruct(r)
	}
	return r.Interface()
}

func finiteStruct(r reflect.Value) any {
	var out orderedObject
	for i := range r.NumField() {
		f := r.Type().Field(i)
		name, opts, _ := strings.Cut(f.Tag.Get("json"), ",")
		if name == "-" {
			continue
		}
		// The members of an embedded struct are the outer struct's own, as in
		// encoding/json, even where the embedded type itself is not exported.
		if f.Anonymous && name == "" && f.Type.Kind() == reflect.Struct {
			if inner, ok := finiteStruct(r.Field(i)).(orderedObject); ok {
				out = append(out, inner...)
			}
			continue
		}
		if !f.IsExported() {
			continue
		}
		if strings.Contains(opts, "omitempty") && r.Field(i).IsZero() {
			continue
		}
		if name == "" {
			name = f.Name
		}
		out = append(out, orderedField{name, finiteValue(r.Field(i).Interface())})
	}
	return out
}
