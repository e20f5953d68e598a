module confirm(input clk, input rst, input contact, output lit);
  localparam OFF = 2'd0, SEEN = 2'd1, SURE = 2'd2, ON = 2'd3;
  reg [1:0] state;
  always @(posedge clk or posedge rst)
    if (rst) state <= OFF;
    else case (state)
      OFF:  if (contact) state <= SEEN;
      SEEN: if (contact) state <= SURE; else state <= OFF;
      SURE: if (contact) state <= ON; else state <= OFF;
      ON:   if (!contact) state <= OFF;
    endcase
  assign lit = state == ON;
endmodule
