package serve

import (
	"github.com/gin-gonic/gin"

	"leat/api/operation"
)

func (s *Server) bulk(op *operation.Operation) gin.HandlerFunc { return func(c *gin.Context) {} }
