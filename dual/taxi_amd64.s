#include "textflag.h"

// func taxiAVX2(sum *[8]float64, a, b *float32, blocks int)
// Four accumulators of eight float32 lanes each.
TEXT ·taxiAVX2(SB), NOSPLIT, $0-32
	MOVQ sum+0(FP), DX
	MOVQ a+8(FP), SI
	MOVQ b+16(FP), DI
	MOVQ blocks+24(FP), CX

	VPCMPEQD Y15, Y15, Y15
	VPSRLD   $1, Y15, Y15 // clears the sign of a float32
	VXORPS   Y0, Y0, Y0
	VXORPS   Y1, Y1, Y1
	VXORPS   Y2, Y2, Y2
	VXORPS   Y3, Y3, Y3

loop:
	VMOVUPS (SI), Y4
	VMOVUPS 32(SI), Y5
	VMOVUPS 64(SI), Y6
	VMOVUPS 96(SI), Y7
	VSUBPS  (DI), Y4, Y4
	VSUBPS  32(DI), Y5, Y5
	VSUBPS  64(DI), Y6, Y6
	VSUBPS  96(DI), Y7, Y7
	VANDPS  Y15, Y4, Y4
	VANDPS  Y15, Y5, Y5
	VANDPS  Y15, Y6, Y6
	VANDPS  Y15, Y7, Y7
	VADDPS  Y4, Y0, Y0
	VADDPS  Y5, Y1, Y1
	VADDPS  Y6, Y2, Y2
	VADDPS  Y7, Y3, Y3

	ADDQ $128, SI
	ADDQ $128, DI
	DECQ CX
	JNZ  loop

	VADDPS       Y1, Y0, Y0
	VADDPS       Y3, Y2, Y2
	VADDPS       Y2, Y0, Y0
	VEXTRACTF128 $1, Y0, X1
	VCVTPS2PD    X0, Y0
	VCVTPS2PD    X1, Y1
	VADDPD       (DX), Y0, Y0
	VADDPD       32(DX), Y1, Y1
	VMOVUPD      Y0, (DX)
	VMOVUPD      Y1, 32(DX)
	VZEROUPPER
	RET
