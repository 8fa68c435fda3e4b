package sparkplug

import (
	"sync"

	"google.golang.org/protobuf/proto"
	"google.golang.org/protobuf/reflect/protodesc"
	"google.golang.org/protobuf/reflect/protoreflect"
	"google.golang.org/protobuf/types/descriptorpb"
	"google.golang.org/protobuf/types/dynamicpb"
)

// reference is the message Payload of the standard as far as it is read here, for the
// general decoder of google.golang.org/protobuf.
var reference = sync.OnceValue(func() protoreflect.MessageDescriptor {
	type kind = descriptorpb.FieldDescriptorProto_Type
	field := func(name string, number int32, t kind, of string, many bool) *descriptorpb.FieldDescriptorProto {
		label := descriptorpb.FieldDescriptorProto_LABEL_OPTIONAL
		if many {
			label = descriptorpb.FieldDescriptorProto_LABEL_REPEATED
		}
		f := &descriptorpb.FieldDescriptorProto{Name: &name, Number: &number, Type: &t, Label: &label}
		if of != "" {
			f.TypeName = proto.String(".sparkplug." + of)
		}
		return f
	}
	const (
		u64, u32, yes = descriptorpb.FieldDescriptorProto_TYPE_UINT64, descriptorpb.FieldDescriptorProto_TYPE_UINT32, descriptorpb.FieldDescriptorProto_TYPE_BOOL
		text, raw     = descriptorpb.FieldDescriptorProto_TYPE_STRING, descriptorpb.FieldDescriptorProto_TYPE_BYTES
		f32, f64      = descriptorpb.FieldDescriptorProto_TYPE_FLOAT, descriptorpb.FieldDescriptorProto_TYPE_DOUBLE
		nested        = descriptorpb.FieldDescriptorProto_TYPE_MESSAGE
	)
	type fields = []*descriptorpb.FieldDescriptorProto
	file, err := protodesc.NewFile(&descriptorpb.FileDescriptorProto{
		Name: proto.String("sparkplug.proto"), Package: proto.String("sparkplug"), Syntax: proto.String("proto2"),
		MessageType: []*descriptorpb.DescriptorProto{
			{Name: proto.String("Payload"), Field: fields{
				field("timestamp", 1, u64, "", false), field("metrics", 2, nested, "Metric", true), field("seq", 3, u64, "", false),
				field("uuid", 4, raw, "", false), field("body", 5, raw, "", false)}},
			{Name: proto.String("Metric"), Field: fields{
				field("name", 1, raw, "", false), field("alias", 2, u64, "", false), field("timestamp", 3, u64, "", false), field("datatype", 4, u32, "", false),
				field("is_historical", 5, yes, "", false), field("is_transient", 6, yes, "", false), field("is_null", 7, yes, "", false),
				field("metadata", 8, raw, "", false), field("properties", 9, nested, "Set", false),
				field("int_value", 10, u32, "", false), field("long_value", 11, u64, "", false), field("float_value", 12, f32, "", false),
				field("double_value", 13, f64, "", false), field("boolean_value", 14, yes, "", false), field("string_value", 15, raw, "", false)}},
			{Name: proto.String("Set"), Field: fields{field("keys", 1, raw, "", true), field("values", 2, nested, "Value", true)}},
			{Name: proto.String("Value"), Field: fields{
				field("type", 1, u32, "", false), field("is_null", 2, yes, "", false), field("int_value", 3, u32, "", false), field("long_value", 4, u64, "", false),
				field("string_value", 8, text, "", false)}},
		},
	}, nil)
	if err != nil {
		panic(err)
	}
	return file.Messages().ByName("Payload")
})

// generic decodes a payload by google.golang.org/protobuf.
func generic(payload []byte) (*dynamicpb.Message, error) {
	m := dynamicpb.NewMessage(reference())
	return m, proto.Unmarshal(payload, m)
}
