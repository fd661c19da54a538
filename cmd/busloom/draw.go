package main

import (
	"bytes"
	"fmt"
	"strings"

	"busloom/diag"
	"busloom/schema"

	"github.com/spf13/cobra"
)

func drawCommand(std *streams) *cobra.Command {
	return &cobra.Command{
		Use:   "draw FILE [MESSAGE...]",
		Short: "Print the bit layout of messages",
		Long: `Draw prints a message's frame as a table of bytes and bits with a key: where
each value sits, its heaviest bit in upper case. Messages are named as in the
description, or by identifier (0x1A0). Without a message it lists them all.`,
		Example: `  busloom draw schemas/heron.bus
  busloom draw schemas/heron.bus WheelSpeeds
  busloom draw heron.json 0x1A0`,
		Args: atLeast(1, "a description and the messages to draw"),
		RunE: func(_ *cobra.Command, args []string) error {
			network, err := loadNetwork(std, args[0])
			if err != nil {
				return err
			}
			var b bytes.Buffer
			if len(args) == 1 {
				network.List(&b)
			}
			for _, name := range args[1:] {
				found := network.FindMessages(name)
				if len(found) == 0 {
					return usageError("%s has no message %s%s", args[0], name, suggestion(name, network))
				}
				for _, m := range found {
					if b.Len() > 0 {
						fmt.Fprintln(&b)
					}
					if err := m.Draw(&b); err != nil {
						return err
					}
				}
			}
			if _, err := std.out.Write(b.Bytes()); err != nil {
				return ioError(err)
			}
			return nil
		},
	}
}

func suggestion(name string, network *schema.Network) string {
	var names []string
	for _, m := range network.Messages {
		names = append(names, m.Name)
	}
	if near := diag.Nearest(name, names); near != "" {
		return fmt.Sprintf(" (did you mean %s?)", near)
	}
	return fmt.Sprintf("; it has %d messages: %s", len(names), strings.Join(names[:min(len(names), 8)], ", ")+" ...")
}
